"""Fit jobs with a covariance of the theory: the matrix by hand, what is said of it, what is refused."""

import numpy as np
import pytest
import scalewright as sw
from cli.fit_case import GRID, write_case
from scalewright.cli.fit_job import read_fit_job
from scalewright.cli.fitted import fit_data
from scalewright.cli.main import main

# two processes, so that something is common and something is not; both ratios together: 3 points
KEYS = """
[chi_square]
reference = "data"

[chi_square.scale_variations]
points = "3"
factor = 2
processes = { "Run 1, positrons" = "first", "Run 2, electrons" = "second" }

[shape]"""
AT_NLO = (('order = "LO"', 'order = "NLO"'), ('theory = ["alpha_s"]', ""), ('journal = "fit.journal"', ""))


@pytest.fixture
def write(tmp_path):
    """Write the case with a second table, at NLO, with the keys as a test changes them."""

    def written(*changes):
        write_case(tmp_path)
        second = (tmp_path / "run1.toml").read_text()
        second = second.replace("Run 1, positrons", "Run 2, electrons").replace('"e+"', '"e-"')
        (tmp_path / "run2.toml").write_text(second)
        text = (tmp_path / "job.toml").read_text().replace('"run1.toml"', '["run1.toml", "run2.toml"]')
        for old, new in (("\n[shape]", KEYS), *AT_NLO, *changes):
            text = text.replace(old, new)
        (tmp_path / "job.toml").write_text(text)
        return tmp_path / "job.toml"

    return written


def test_the_covariance_is_that_of_predictions_made_by_hand(write):
    job = read_fit_job(write())
    fitted = fit_data(job, job.maps(), job.measured)
    # around the fit that knows nothing of scales
    plain = sw.fit(job.maps()(), sw.ChiSquare(job.measured), job.shape, priors=job.priors)

    def moved(ratio):
        theory = sw.Theory(
            order="NLO", coupling=sw.Coupling(0.3, q2=2.0, nf=3), flavours=3,
            hard_muf2_ratio=ratio, hard_mur2_ratio=ratio,
        )  # fmt: skip
        fmap = sw.forward_map(theory, GRID, start_q2=2.0, points=job.measured)
        return fmap.predict(plain.densities)[0]

    up, down = moved(2.0) - moved(1.0), moved(0.5) - moved(1.0)
    # arXiv:1906.10698, section 4.2, three points (recalled from memory): one process, and two different ones
    same = (np.outer(up, up) + np.outer(down, down)) / 2
    other = np.outer(up + down, up + down) / 4
    owner = job.measured.table_of
    expected = np.where(np.equal.outer(owner, owner), same, other)
    # the two fits are the same to rounding of their minima, 1e-10 of an error
    np.testing.assert_allclose(fitted.scales.matrix, expected, rtol=1e-6, atol=1e-9 * expected.max())
    known = fitted.chi_square.covariance - sw.ChiSquare(job.measured).covariance
    np.testing.assert_allclose(known, fitted.scales.matrix, rtol=1e-9, atol=1e-9 * expected.max())
    again = sw.fit(job.maps()(), sw.ChiSquare(job.measured, theory=expected), job.shape, priors=job.priors)
    # a minimum is one within a thousandth of an error
    assert (abs(fitted.result.parameters - again.parameters) < 1e-3 * again.errors).all()


def test_screen_and_report_name_what_varies(write, capsys, tmp_path):
    path = write(("number = 6", "number = 2"))
    assert main(["fit", str(path)]) == 0
    said = capsys.readouterr().out
    words = "scale variations, 3 points: hard_muf2_ratio varies for all data at once"
    page = (tmp_path / "fit.html").read_text()
    assert words in said and words in page
    assert "ratios times and over 2 make errors of" in said
    assert "covariance of the theory" in page


WRONG = {
    "an unknown prescription": ('points = "3"', 'points = "4"', "scale_variations]: points = '4'"),
    "an unknown key": ("factor = 2", "factors = 2", 'factors: unknown key; did you mean "factor"?'),
    "a factor of one": ("factor = 2", "factor = 1", "factor = 1: factor must lie in (1, inf)"),
    "one ratio twice": ("factor = 2", 'own = "hard_muf2_ratio"', '"hard_muf2_ratio": is common already'),
    "an unknown ratio": ("factor = 2", 'own = "mu2"', "own = 'mu2'"),
    "an unknown table": ('"Run 2, electrons" =', '"Run 3" =', "Run 3: unknown key"),
    "a table left out": (', "Run 2, electrons" = "second"', "", "processes] Run 2, electrons: missing"),
    "scales that are too low": ("factor = 2", "factor = 400", "hard_muf2_ratio times 0.0025"),
}  # fmt: skip


@pytest.mark.parametrize("case", WRONG)
def test_what_is_asked_wrongly_is_named(write, capsys, case):
    old, new, says = WRONG[case]
    assert main(["fit", str(write((old, new)))]) == 2
    out, said = capsys.readouterr()
    assert says in said, said
    assert said.startswith("scalewright: ") and said.count("\n") == 1 and out == ""


def test_a_closure_test_takes_none(write, capsys):
    path = write()
    text = path.read_text().split("[output]")[0] + "[closure]\nsets = 2\nseed = 1\n"
    path.write_text(text)
    assert main(["closure", str(path)]) == 2
    assert "[chi_square] scale_variations: the theory of a closure test" in capsys.readouterr().err
