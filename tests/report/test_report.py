"""The report of a fit: one file that needs nothing outside, says what is so, and hides nothing."""

import base64
import re
from html.parser import HTMLParser
from xml.etree import ElementTree

import numpy as np
import pytest
import scalewright as sw
from cli.fit_case import GRID, THEORY, law, shape, write_case
from scalewright.fitting.least_squares import FitResult
from scalewright.fitting.maps import Maps
from scalewright.report import fit_report

VOID = {"meta", "img", "br"}
OPTIONS = {
    "truth": {"alpha_s": 0.3, "u_v(0.3)": law().at(None, 0.3, "u_v")[0]},
    "history": [30.0, 29.5],
    "notes": {"electroweak inputs": "effective"},
    "job": "[theory]\norder = <LO>",
}
BLIND = "WARNING: the data do not see <this>"
OUTSIDE = {"script", "link", "iframe", "object", "embed", "base", "form"}


class Reader(HTMLParser):
    """Check that tags close in order, and collect what is in them."""

    def __init__(self):
        super().__init__()
        self.open, self.links, self.images, self.words, self.tags = [], [], [], [], []

    def handle_starttag(self, tag, attrs):
        self.tags.append(tag)
        given = dict(attrs)
        self.links += [given[name] for name in ("href", "src") if name in given]
        if tag == "img":
            assert given["alt"]
            self.images.append(given["src"])
        if tag not in VOID:
            self.open.append(tag)

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        self.words.append(data)


@pytest.fixture(scope="module")
def fitted(tmp_path_factory):
    """A small fit with replicas, one of which is said to have failed."""
    folder = tmp_path_factory.mktemp("case")
    write_case(folder)
    table = sw.Measurements.read(folder / "run1.toml").cut(x=(0.03, 1.0))
    small = shape().restricted(
        fixed=["g.power", "g.fall", "d_v.fall", "ubar.fall"], tied={"d_v.power": "u_v.power"}
    )
    fmap = Maps(THEORY, GRID, start_q2=2.0, points=table)()
    chi2 = sw.ChiSquare(table)
    result = sw.fit(fmap, chi2, small, theory=["alpha_s"])
    ensemble = sw.fit_replicas(fmap, chi2, small, replicas=12, seed=1, theory=["alpha_s"], workers=1)
    lost = {12: "not converged: <stopped> & lost"}
    kept = {
        name: getattr(ensemble, name) for name in ("parameters", "names", "chi2", "chi2_data", "data", "seed")
    }
    return result, chi2, sw.Ensemble(ensemble.densities, failed=lost, notes=[BLIND], **kept)


@pytest.fixture(scope="module")
def page(fitted, tmp_path_factory):
    path = tmp_path_factory.mktemp("report") / "fit.html"
    result, chi2, ensemble = fitted
    fit_report(
        path, result, chi2, ensemble=ensemble, **OPTIONS,
    )  # fmt: skip
    return path


@pytest.fixture(scope="module")
def read(page):
    reader = Reader()
    reader.feed(page.read_text("utf-8"))
    assert reader.open == []
    return reader


def test_nothing_comes_from_outside(page, read):
    assert not set(read.tags) & OUTSIDE
    assert all(link.startswith(("#s", "data:image/")) for link in read.links)
    text = re.sub(r"base64,[\w+/=]+", "", page.read_text("utf-8"))
    assert "http" not in text and "url(" not in text and "@import" not in text


def test_every_picture_is_whole(read):
    pytest.importorskip("matplotlib")
    assert len(read.images) >= 9
    for source in read.images:
        kind, data = source.removeprefix("data:image/").split(";base64,")
        content = base64.b64decode(data)
        if kind == "png":
            assert content.startswith(b"\x89PNG") and content.endswith(b"IEND\xaeB`\x82")
        else:
            tree = ElementTree.fromstring(content)
            hrefs = [v for e in tree.iter() for k, v in e.attrib.items() if k.endswith("href")]
            assert all(href.startswith(("#", "data:")) for href in hrefs)


def test_all_that_is_promised_is_there(read):
    titles = [
        "In short", "What was assumed", "Data", "Convergence", "Densities", "Momentum shares",
        "Data against prediction", "Pulls", "Parameters", "Correlations", "alpha_s and masses", "Replicas",
        "Against the law behind the data", "Origin",
    ]  # fmt: skip
    assert set(titles) <= set(read.words)
    anchors = [link for link in read.links if link.startswith("#")]
    assert len(anchors) == len(titles) == len(set(anchors))


def test_the_numbers_are_those_of_the_fit(read, fitted):
    result, chi2, ensemble = fitted
    text = "\n".join(read.words)
    assert f"chi-square {result.chi2:.1f} for {result.data} data and 5 free parameters" in text
    assert f"{result.value('alpha_s'):.5g} +- {result.error('alpha_s'):.2g}" in text
    for line in (*result.status, *result.theory.describe().splitlines()):
        assert line in text
    for name in result.names:
        assert name in read.words and f"{ensemble.parameter(name).mean():.5g}" in read.words
    part = chi2.per_table(result.prediction)[0]
    assert f"{part.alone:.1f}" in read.words
    assert "0.03 <= x <= 1: removed" in text
    share = 100 * result.densities.moment("g", 2)[0]
    assert f"{share:.2f}" in read.words
    assert "30.00, 29.50" in text


def test_failed_fits_are_listed_and_warned_of(read):
    text = "\n".join(read.words)
    assert "1 fits to pseudo-data failed, more than 1 per cent" in text
    start, end = (read.words.index(title, 20) for title in ("In short", "What was assumed"))
    assert BLIND.removeprefix("WARNING: ") in read.words[start:end]  # what must not be overlooked comes first
    assert "not converged: <stopped> & lost" in text  # escaped in the file, read back whole
    assert "order = <LO>" in text


def test_a_stored_fit_makes_the_same_report(page, fitted, tmp_path):
    result, chi2, ensemble = fitted
    result.save(tmp_path / "fit.h5")
    fit_report(
        tmp_path / "fit.html", FitResult.load(tmp_path / "fit.h5"), chi2, ensemble=ensemble,
        **OPTIONS,
    )  # fmt: skip
    assert (tmp_path / "fit.html").read_bytes() == page.read_bytes()


def test_without_matplotlib_the_report_says_so(fitted, tmp_path, monkeypatch):
    from scalewright.report import fit as module

    monkeypatch.setattr(module, "find_spec", lambda name: None)
    fit_report(tmp_path / "fit.html", fitted[0], fitted[1])
    text = (tmp_path / "fit.html").read_text("utf-8")
    assert "No pictures: matplotlib was not installed" in text and "<img" not in text
    assert "There are none: uncertainties are those of the second derivatives alone." in text


def test_parts_that_do_not_belong_together_are_refused(fitted, tmp_path):
    result, chi2, ensemble = fitted
    path = tmp_path / "fit.html"
    with pytest.raises(sw.InputError, match="result must be a FitResult, not int"):
        fit_report(path, 3, chi2)
    less = sw.ChiSquare(chi2.measurements.cut(x=(0.1, 1.0)))
    with pytest.raises(sw.InputError, match="chi_square"):
        fit_report(path, result, less)
    with pytest.raises(sw.InputError, match=r"alpha_s = nan"):
        fit_report(path, result, chi2, truth={"alpha_s": np.nan})
    weights = np.arange(1.0, 13.0)
    names, sets = ensemble.names, ensemble.parameters
    weighted = sw.Ensemble(ensemble.densities, parameters=sets, names=names, weights=weights)
    with pytest.raises(sw.InputError, match="at least two replicas, of equal weight"):
        fit_report(path, result, chi2, ensemble=weighted)
    with pytest.raises(sw.InputError, match=r"its parameters are .*, those of the fit"):
        fit_report(path, result, chi2, ensemble=sw.Ensemble(ensemble.densities))
    with pytest.raises(sw.StoreError, match="cannot be written"):
        fit_report(tmp_path / "none" / "fit.html", result, chi2)
    assert not path.exists()
