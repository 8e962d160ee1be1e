"""The made-up campaign: what ships is what its script writes, drawn from the law that is documented."""

import re

import numpy as np
import pytest
import scalewright as sw
from cli import make_campaign
from scalewright.cli import campaign
from scipy.integrate import quad


@pytest.fixture(scope="module")
def grid():
    return sw.ChebyshevGrid(x_min=1e-5)


@pytest.fixture(scope="module")
def measured():
    return campaign.measured()


@pytest.fixture(scope="module")
def truth(measured, grid):
    return campaign.carried(measured, grid).predict(campaign.law(grid))[0]


def test_the_script_writes_what_ships(tmp_path, measured):
    make_campaign.write(tmp_path)
    shipped = campaign.folder()
    assert {path.name for path in tmp_path.iterdir()} == {p.name for p in shipped.iterdir()} - {"README.md"}
    for path in tmp_path.glob("*.toml"):
        assert path.read_text() == (shipped / path.name).read_text()
    again = sw.Measurements.read(tmp_path / "campaign.toml")
    # another processor may round the last of five printed digits the other way
    np.testing.assert_allclose(again.value, measured.value, rtol=1.01e-4)
    np.testing.assert_allclose(again.covariance(), measured.covariance(), rtol=0.02, atol=1e-9)


def test_the_law_is_that_of_the_read_me(grid):
    text = (campaign.folder() / "README.md").read_text("utf-8")
    law = campaign.law(grid)
    x = np.array([1e-4, 0.01, 0.3])
    found = re.findall(r"x (?:s = x )?(\w+) += ([\w.]+) x\^(-?[\d.]+) \(1-x\)\^([\d.]+)", text)
    assert [name for name, *_ in found] == ["u_v", "ubar", "d_v", "dbar", "g", "sbar"]
    sizes = {"A_u": 2.0, "A_d": 1.0}
    for name, size, a, b in found:
        a, b = float(a), float(b)
        if size in sizes:  # normalised by an integral of scipy's
            norm = sizes[size] / quad(lambda t, a=a, b=b: t ** (a - 1) * (1 - t) ** b, 0, 1, epsrel=1e-10)[0]
        else:
            norm = float(re.search(r"A_g = ([\d.]+)", text)[1]) if size == "A_g" else float(size)
        # seven printed digits of A_g, and interpolation on the grid
        np.testing.assert_allclose(law.at(None, x, name)[0], norm * x**a * (1 - x) ** b, rtol=2e-6)


def test_the_law_obeys_the_sum_rules():
    # number and momentum of a closed form by scipy's quadrature, asked for 1e-10
    def integral(f):
        return sum(quad(f, *ends, epsrel=1e-10, limit=200)[0] for ends in ((0, 1e-3), (1e-3, 1)))

    density = campaign._density
    for flavour, number in ((2, 2.0), (1, 1.0), (3, 0.0)):
        valence = integral(lambda x, f=flavour: float(density(f, x) - density(-f, x)) / x)
        assert valence == pytest.approx(number, abs=1e-8)
    momentum = integral(lambda x: float(sum(density(f, x) for f in (21, 1, -1, 2, -2, 3, -3))))
    assert momentum == pytest.approx(1.0, abs=1e-8)


def test_the_data_scatter_around_the_law_as_they_say(measured, truth):
    chi_square = sw.ChiSquare(measured, reference=truth)
    total, count = chi_square.value(truth), len(measured)
    assert count == 590
    # four standard deviations of a chi-square
    assert abs(total - count) < 4 * np.sqrt(2 * count)
    for part in chi_square.per_table(truth):
        assert abs(part.alone - part.data) < 4 * np.sqrt(2 * part.data)
    assert (abs(chi_square.shifts(truth)) < 4).all()
    text = (campaign.folder() / "README.md").read_text("utf-8")
    assert f"chi-square is {total:.1f} for {count} points" in text


def test_another_law_is_seen(measured, truth, grid):
    law = campaign.law(grid)
    values = law.values.copy()
    values[:, law.flavours.index(21)] *= 1.05
    other = campaign.carried(measured, grid).predict(values)[0]
    chi_square = sw.ChiSquare(measured, reference=truth)
    # 5 per cent more gluon is five standard deviations or more away from the law: 25 in chi-square
    assert chi_square.value(other) - chi_square.value(truth) > 25.0


def test_points_lie_where_experiments_reach(measured):
    assert ((measured.y > 0.009) & (measured.y < 0.86)).all()
    assert measured.q2.min() > 3.5
    assert (measured.value > 0.0).all()
    assert set(measured.rows.beam) == {"e+", "e-"}
    assert set(measured.rows.current) == {"neutral", "charged"}
    assert set(measured.rows.s) == {1e5, 4e4}
    assert len(measured.names_of_sources) == 5
