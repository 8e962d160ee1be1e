"""A theory as an object: numbers of flavours, thresholds, copies, texts."""

import copy
import dataclasses
import math
import pickle

import numpy as np
import pytest
from scalewright import Coupling, InputError, QuarkMasses, Theory

POLE = QuarkMasses(charm=1.5, bottom=4.5, top=175.0, kind="pole")
THEORIES = [
    Theory(),
    Theory(order="LO", flavours=4),
    Theory(order="NLO", coupling=Coupling(0.35, q2=2.0, nf=3), masses=POLE, flavours=(3, 6)),
    Theory(threshold_mu2_ratio=(1.0, 2.0, 0.5), evolution_mu2_ratio=0.5, running_loops=5),
    Theory(thresholds_q2=[2.0, 20.0, 30000.0], heavy_gluon_element="compact"),
]


@pytest.mark.parametrize("theory", THEORIES)
def test_json_pickle_and_copies_give_the_same_theory(theory):
    theory.handle()  # a handle of the core must not be dragged along
    others = [Theory.from_json(theory.to_json()), pickle.loads(pickle.dumps(theory))]
    others += [copy.copy(theory), copy.deepcopy(theory), dataclasses.replace(theory)]
    for other in others:
        assert other == theory and hash(other) == hash(theory)
    assert theory.handle() is theory.handle()


def test_different_theories_differ():
    assert len(set(THEORIES)) == len(THEORIES)
    assert Theory(flavours=(4, 4)) == Theory(flavours=4)
    assert Theory(threshold_mu2_ratio=[2, 2, 2]) == Theory(threshold_mu2_ratio=2.0)


def test_a_theory_is_frozen():
    with pytest.raises(dataclasses.FrozenInstanceError, match="order"):
        Theory().order = "LO"


def test_a_scale_on_a_threshold_counts_as_above():
    theory = Theory(masses=POLE, flavours=(3, 6))
    below = np.nextafter([2.25, 20.25, 30625.0], 0.0)
    assert theory.nf_at([2.25, 20.25, 30625.0]).tolist() == [4, 5, 6]
    assert theory.nf_at(below).tolist() == [3, 4, 5]
    assert theory.start_nf(2.25) == 4


@pytest.mark.parametrize(
    ("flavours", "counts"), [((3, 5), [3, 4, 5, 5]), ((4, 6), [4, 4, 5, 6]), (4, [4] * 4), (6, [6] * 4)]
)
def test_fewest_and_most_flavours_bound_the_count(flavours, counts):
    theory = Theory(masses=POLE, flavours=flavours)
    asked = [1.0, 10.0, 100.0, 1e5]
    assert theory.nf_at(asked).tolist() == counts
    assert theory.handle().nf_at(np.array(asked)).tolist() == counts


def test_thresholds_come_from_ratios_or_are_given():
    assert Theory(masses=POLE, threshold_mu2_ratio=(1, 4, 1)).threshold_scales == (2.25, 81.0, 30625.0)
    assert Theory(thresholds_q2=(2, 20, 30000)).threshold_scales == (2.0, 20.0, 30000.0)


def test_coupling_is_the_given_one_at_its_scale():
    theory = Theory()
    value = theory.alpha_s(91.1876**2)
    assert np.ndim(value) == 0
    assert value == pytest.approx(0.118, rel=1e-14)  # rounding of one evaluation


def test_leading_coupling_is_the_closed_form():
    # d a/d ln mu^2 = -b0 a^2 with b0 = 11 - 2 nf/3: common practice (D. Gross and F. Wilczek, 1973)
    theory = Theory(order="LO", coupling=Coupling(0.3, q2=4.0, nf=4), flavours=4)
    q2 = np.array([[2.0, 4.0, 30.0], [1e2, 1e4, 1e8]])
    b0 = 11 - 2 * 4 / 3
    exact = 0.3 / (1 + 0.3 * b0 / (4 * math.pi) * np.log(q2 / 4.0))
    np.testing.assert_allclose(theory.alpha_s(q2), exact, rtol=1e-13)  # that of the solver


def test_coupling_changes_flavours_where_the_factorisation_scale_crosses():
    # at NNLO alpha_s jumps there, so the two sides can be told
    theory = Theory(masses=POLE, evolution_mu2_ratio=4.0)
    on = 4.0 * 20.25
    below, above = theory.alpha_s(on, nf=4), theory.alpha_s(on, nf=5)
    assert below != above
    assert theory.alpha_s(on) == above
    # one ulp of the scale moves alpha_s by less than rounding
    assert theory.alpha_s(np.nextafter(on, 0.0)) == pytest.approx(below, rel=1e-15)


@pytest.mark.parametrize("theory", THEORIES)
def test_texts_name_every_option(theory):
    assert "\n" not in repr(theory)
    assert str(theory) == theory.describe()
    for word in (theory.order, "alpha_s", "GeV", "loops", "MS-bar", "a_Hg", "mu_r^2/mu_f^2", "mu_f^2/Q^2"):
        assert word.lower() in theory.describe().lower()
    assert theory._repr_html_().count("<tr>") == 10
    assert len(theory.describe().splitlines()) <= 24
    assert "exact inverse" in theory._repr_html_()  # the conventions are there, folded


def test_the_description_says_what_surprises():
    said = " ".join(Theory(evolution_mu2_ratio=2.0).describe().split())
    for convention in (
        "the coupling there is that of nf + 1 flavours at mu_r^2 = mu_thr^2, also where mu_r differs",
        "there is no intrinsic matching at a^2 (NNLO)",
        "downwards at a threshold: the exact inverse of the upward step; an intrinsic heavy density",
        "the same bits on one kind of CPU, whatever the number of threads; 1e-12 of each other between kinds",
    ):
        assert convention in said


def test_numbers_are_shown_short_and_kept_exact():
    theory = Theory(masses=QuarkMasses(charm=1.27, bottom=4.18))
    assert theory.threshold_scales[1] == 4.18**2 == 17.472399999999997
    assert "17.4724 GeV^2" in theory.describe()
    assert repr(theory.coupling) == "Coupling(alpha_s=0.118, q2=8315.178393760001, nf=5)"


def test_options_from_a_table_are_checked_with_their_path():
    with pytest.raises(InputError, match=r"\[theory\]: unknown option 'ordr'.*did you mean \"order\"\?"):
        Theory.from_dict({"ordr": "LO"}, where="[theory]")
    with pytest.raises(InputError, match=r"\[theory\]\.masses\.charm = -1: charm must lie in \(0, 1e\+100\)"):
        Theory.from_dict({"masses": {"charm": -1}}, where="[theory]")
    with pytest.raises(InputError, match=r"\[theory\]\.coupling: must be a table of options, not float"):
        Theory.from_dict({"coupling": 0.118}, where="[theory]")
    with pytest.raises(InputError, match="theory: not JSON text"):
        Theory.from_json("{")
    made = Theory.from_dict({"order": "NLO", "flavours": [3, 4], "masses": {"charm": 1.4}})
    assert made == Theory(order="NLO", flavours=(3, 4), masses=QuarkMasses(charm=1.4))
