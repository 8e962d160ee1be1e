"""Derivatives by central differences, and theories a step away: what the exact ones are held against."""

from dataclasses import replace

import numpy as np
import scalewright as sw

#: Smallest step, as a part of the parameter; steps h, 2h, 4h are combined so that the error falls like h^6.
#: With values good to 1e-12 what is left is 1e-9 of what changes by its own size over its argument.
STEP = 2.5e-3
#: Relative error of the steps in scale of what differences are taken of.
TOLERANCE = 1e-12


def differentiated(build, centre):
    """Return d build/d parameter at `centre`, and how far the combination of two steps is from it."""
    central = []
    for times in (1.0, 2.0, 4.0):
        h = times * STEP * centre
        central.append((build(centre + h) - build(centre - h)) / (2.0 * h))
    # Richardson: the errors are even powers of h
    fourth = [(4.0 * central[i] - central[i + 1]) / 3.0 for i in range(2)]
    best = (16.0 * fourth[0] - fourth[1]) / 15.0
    return best, np.abs(best - fourth[0])


def value(theory, parameter):
    """Return alpha_s, a mass or a ratio of scales of a theory."""
    if parameter == "alpha_s":
        return theory.coupling.alpha_s
    holder = theory.masses if parameter in ("charm", "bottom", "top") else theory
    return getattr(holder, parameter)


def moved(theory, parameter, to):
    """Return the theory with another value, thresholds where they were."""
    fixed = replace(theory, threshold_mu2_ratio=1.0, thresholds_q2=theory.threshold_scales)
    if parameter == "alpha_s":
        return replace(fixed, coupling=sw.Coupling(to, q2=theory.coupling.q2, nf=theory.coupling.nf))
    if parameter in ("charm", "bottom", "top"):
        return replace(fixed, masses=replace(theory.masses, **{parameter: to}))
    return replace(fixed, **{parameter: to})
