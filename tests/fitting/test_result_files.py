"""A fit that is stored and read again answers as before; what it cannot answer it refuses."""

import numpy as np
import pytest
import scalewright as sw
from fitting.problems import bent_shape, chi_square, fmap, truth, twin_shape
from scalewright.fitting.least_squares import FitResult, fit
from scalewright.fitting.maps import KnownMap, Maps, theory_at


@pytest.fixture
def again(bent, tmp_path):
    """The fit of the session, stored and read."""
    bent[2].save(tmp_path / "fit.h5")
    return bent[2], FitResult.load(tmp_path / "fit.h5")


def test_every_answer_is_the_same_to_the_last_bit(again):
    result, read = again
    assert str(read) == str(result) and repr(read) == repr(result) and read.status == result.status
    for name in ("parameters", "errors", "covariance", "linear_covariance", "gradient", "singular_values",
                 "prediction", "changes"):  # fmt: skip
        np.testing.assert_array_equal(getattr(read, name), getattr(result, name), err_msg=name)
    assert read.densities == result.densities and read.eigenvectors() == result.eigenvectors()
    assert read.solved == result.solved and read.calls == result.calls
    np.testing.assert_array_equal(read.error_of([0.01, 0.3], "u_v"), result.error_of([0.01, 0.3], "u_v"))


def test_stored_twice_is_the_same_file(again, tmp_path):
    again[1].save(tmp_path / "second.h5")
    assert (tmp_path / "second.h5").read_bytes() == (tmp_path / "fit.h5").read_bytes()


def test_what_needs_the_map_is_refused(again):
    with pytest.raises(sw.InputError, match="a stored fit has no forward map: for this, fit again"):
        again[1].profile("g.power", [-0.1])


def test_the_error_of_any_quantity_is_that_of_its_special_case(again):
    result, _ = again
    # both are linear in the densities: the same number in two ways, to rounding
    x = [0.01, 0.1, 0.5]
    np.testing.assert_allclose(
        result.error_through(lambda d: d.at(None, x, "g")), result.error_of(x, "g"), rtol=1e-10
    )
    # a sum of fixed momentum does not vary
    assert result.error_through(lambda d: d.number("u", part="above")) < 0.02


def test_a_fit_without_covariance_is_stored_too(tmp_path):
    shape = twin_shape()
    result = fit(fmap(), chi_square(truth(shape), seed=1), shape)
    assert result.covariance is None and result.blind
    result.save(tmp_path / "fit.h5")
    read = FitResult.load(tmp_path / "fit.h5")
    assert str(read) == str(result) and read.covariance is None
    np.testing.assert_array_equal(read.blind[0].values, result.blind[0].values)
    with pytest.raises(sw.InputError, match="there is no covariance"):
        read.error_of(0.1, "g")


def test_bounds_and_priors_are_kept(tmp_path):
    shape = bent_shape().restricted(bounds={"g.fall": (5.1, 9.0)}, start={"g.fall": 6.0},
                                    priors={"dbar.c0": (0.25, 0.1)})  # fmt: skip
    result = fit(fmap(), chi_square(truth(bent_shape()), seed=2, size=0.002, common=0.001), shape)
    assert result.at_bounds
    result.save(tmp_path / "fit.h5")
    read = FitResult.load(tmp_path / "fit.h5")
    assert read.at_bounds == result.at_bounds and str(read) == str(result)
    assert read.chi2_priors == result.chi2_priors


def test_a_file_of_another_kind_or_damaged_is_refused(again, tmp_path):
    again[0].densities.save(tmp_path / "densities.h5")
    with pytest.raises(sw.StoreError, match="holds densities, not fit"):
        FitResult.load(tmp_path / "densities.h5")
    with pytest.raises(sw.StoreError, match="holds fit, not densities"):
        sw.Densities.load(tmp_path / "fit.h5")
    data = bytearray((tmp_path / "fit.h5").read_bytes())
    data[-9] ^= 1
    (tmp_path / "fit.h5").write_bytes(data)
    with pytest.raises(sw.StoreError, match="damaged"):
        FitResult.load(tmp_path / "fit.h5")


def test_a_map_that_lacks_an_array_is_refused(again, tmp_path):
    from scalewright.files import hdf5

    arrays, notes = hdf5.read(tmp_path / "fit.h5", "fit")
    own = ("kind", "format_version", "program")
    kept = {name: note for name, note in notes.items() if name not in own}
    for name in arrays:
        less = {key: value for key, value in arrays.items() if key != name}
        hdf5.write(tmp_path / "less.h5", "fit", less, kept)
        if name in ("/axes", "/below/momentum", "/below/number", "/grid/x"):
            continue  # absent where unknown, or for other readers
        with pytest.raises(sw.StoreError, match=r"sealed, but not a fit as we write it|holds no"):
            FitResult.load(tmp_path / "less.h5")


def test_maps_remember_and_follow_the_theory():
    from types import SimpleNamespace

    rows = SimpleNamespace(x=[0.1, 0.3], q2=[10.0, 30.0], measure="F2", exchange="photon")
    theory = sw.Theory(order="NLO", masses=sw.QuarkMasses(1.3, 4.2, 162.5, kind="msbar"))
    maps = Maps(theory, sw.ChebyshevGrid(x_min=1e-2), start_q2=1.5, points=rows)
    assert isinstance(maps(), KnownMap) and maps() is maps() and maps.built == 1
    first = maps()
    assert first.derivative("alpha_s") is first.derivative("alpha_s")
    moved = maps({"alpha_s": 0.12})
    direct = sw.forward_map(theory_at(theory, {"alpha_s": 0.12}), maps.grid, start_q2=1.5, points=rows)
    np.testing.assert_array_equal(moved.matrix, direct.matrix)
    assert moved.steps_error == direct.steps_error and maps.built == 2
    heavier = theory_at(theory, {"charm": 1.4})
    assert heavier.masses.charm == 1.4 and heavier.threshold_scales == theory.threshold_scales
    with pytest.raises(sw.InputError, match="parameter = 'top'"):
        theory_at(theory, {"top": 170.0})
    with pytest.raises(AttributeError):
        _ = first.nothing
