"""Names of flavours: against the numbering scheme of the Particle Data Group as `particle` has it."""

import pytest
from particle import Particle
from particle.pdgid import is_quark
from scalewright.flavours import QUARKS, combination, flavour_name, quark


@pytest.mark.parametrize("name", QUARKS)
def test_numbers_are_those_of_the_particle_data_group(name):
    for word, number in ((name, quark(name)), (name + "bar", -quark(name))):
        assert combination(word) == {number: 1.0}
        assert Particle.from_pdgid(number).name == word.replace("bar", "~")
    assert is_quark(quark(name))


def test_the_gluon_is_that_of_the_particle_data_group():
    assert combination("g") == combination("gluon") == combination(21) == combination("21")
    assert Particle.from_pdgid(21).name == "g"


def test_names_and_numbers_are_inverse():
    for number in (21, *range(1, 7), *range(-6, 0)):
        assert combination(flavour_name(number)) == {number: 1.0}


@pytest.mark.parametrize(
    ("name", "weights"),
    [
        ("u_v", {2: 1.0, -2: -1.0}),
        ("u-", {2: 1.0, -2: -1.0}),
        ("c+", {4: 1.0, -4: 1.0}),
        ("c + cbar", {4: 1.0, -4: 1.0}),
        ("c+cbar", {4: 1.0, -4: 1.0}),
        ("c+ + s+", {4: 1.0, -4: 1.0, 3: 1.0, -3: 1.0}),
        ("u+-d", {2: 1.0, -2: 1.0, 1: -1.0}),
        ("dbar - ubar", {-1: 1.0, -2: -1.0}),
        ("2*dbar + 2 ubar", {-1: 2.0, -2: 2.0}),
        ("-0.5*g", {21: -0.5}),
        ("s - sbar", {3: 1.0, -3: -1.0}),
        ("u_v - u + ubar", {}),
        ("-3", {-3: 1.0}),
        ("singlet", {1: 1.0, -1: 1.0, 2: 1.0, -2: 1.0}),
        ("valence", {1: 1.0, -1: -1.0, 2: 1.0, -2: -1.0}),
        ("sea", {-1: 2.0, -2: 2.0}),
        ("singlet - valence", {-1: 2.0, -2: 2.0}),
    ],
)
def test_combinations_are_what_their_names_say(name, weights):
    assert combination(name, quarks=(1, 2)) == weights
