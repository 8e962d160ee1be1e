"""What a theory says of itself, every option and every convention in force; and what operators say.

Knows both by their attributes alone, so that it stands below them.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from ._check import show_all
from ._display import brief, brief_all, screen, table

if TYPE_CHECKING:
    from .operators import Operators
    from .theory import Theory

_HEAVY = ("charm", "bottom", "top")


def option_lines(theory: Theory) -> list[tuple[str, str]]:
    """Return what each option says, as (name, sentence)."""
    return [
        ("order", f"{theory.order}: splitting functions up to a^{len(theory.order) - 1}, exact solution"),
        ("coupling", _coupling(theory)),
        ("running", f"{theory.loops} loops, decoupling with {theory.loops - 1}"),
        ("masses", _masses(theory)),
        ("flavours", _flavours(theory)),
        ("thresholds", _thresholds(theory)),
        ("scale ratio", f"mu_r^2/mu_f^2 = {brief(theory.evolution_mu2_ratio)} in the splitting functions"),
        ("A_Hg at a^2", _element(theory)),
        ("hard scales", _hard(theory)),
        ("coefficients", _coefficients(theory)),
    ]


def operator_lines(operators: Operators) -> list[tuple[str, str]]:
    """Return what a set of operators is, as (name, sentence)."""
    nodes, names, route = operators.grid.nodes, operators.block_names, operators._route
    kind = "any scale in between" if operators.live else "these scales only"
    return [
        ("theory", repr(operators.theory)),
        ("from", route.start_words),
        ("to", f"{route.end_words}; {kind}"),
        ("grid", repr(operators.grid)),
        ("blocks", f"{len(names)} of {nodes} x {nodes} a scale: {show_all(names, 4)}".replace("'", "")),
        ("steps", f"{operators.steps}, largest relative error estimate {operators.error:.1e}"),
    ]


def conventions(theory: Theory) -> str:
    """Return one screen of text: options, then conventions."""
    return f"{screen('Theory', option_lines(theory))}\n{_RULES_TEXT}"


def theory_html(theory: Theory) -> str:
    """Return the options as an HTML table, the conventions folded below it."""
    return table("Theory", option_lines(theory), _RULES_TEXT)


def _coupling(theory: Theory) -> str:
    given = theory.coupling
    return f"alpha_s = {brief(given.alpha_s)} at mu_r^2 = {brief(given.q2)} GeV^2 for nf = {given.nf}"


def _masses(theory: Theory) -> str:
    kind = "pole masses" if theory.masses.kind == "pole" else "MS-bar masses m(m)"
    values = (f"{name} {brief(mass)}" for name, mass in zip(_HEAVY, theory.masses.values, strict=True))
    return f"{', '.join(values)} GeV, {kind}"


def _flavours(theory: Theory) -> str:
    if theory.fewest == theory.most:
        return f"{theory.most}, fixed"
    return f"{theory.fewest} to {theory.most}, decided by mu_f^2"


def _thresholds(theory: Theory) -> str:
    crossed = range(theory.fewest - 3, theory.most - 3)
    if not crossed:
        return "none"
    scales = brief_all(theory.threshold_scales[i] for i in crossed)
    names = ", ".join(_HEAVY[i] for i in crossed)
    return f"mu_f^2 = {scales} GeV^2 ({names}); a scale on a threshold counts as above it"


def _element(theory: Theory) -> str:
    if theory.heavy_gluon_element == "exact":
        return "exact (M. Buza et al., hep-ph/9612398)"
    return "compact parametrisation (A. Vogt, hep-ph/0408244)"


def _hard(theory: Theory) -> str:
    ratios = brief(theory.hard_mur2_ratio), brief(theory.hard_muf2_ratio)
    return f"mu_r^2/Q^2 = {ratios[0]}, mu_f^2/Q^2 = {ratios[1]} in coefficient functions"


def _coefficients(theory: Theory) -> str:
    power = len(theory.order) - 2
    longitudinal = power + (theory.fl_counting == "own")
    counting = f"F2 and xF3 up to a^{power}, FL up to a^{longitudinal} ({theory.fl_counting} counting)"
    return f"{counting}; heavy quarks {theory.heavy_quarks}"


_RULES = (
    "a = alpha_s/(4 pi), MS-bar; d f/d ln mu^2 = sum_k a^(k+1) P_k * f, nothing expanded",
    "densities are x f(x); scales are squared, in GeV^2; flavours are PDG numbers",
    "coupling: exact solution of the renormalisation-group equation; n loops decouple with n - 1,",
    "  the upward step as published, the downward step its exact inverse",
    "densities at a threshold: continuous at LO, a^1 logarithms at NLO, a^2 at NNLO; the coupling there is",
    "  that of nf + 1 flavours at mu_r^2 = mu_thr^2, also where mu_r differs from mu_f elsewhere",
    "intrinsic heavy densities are matched up to a^1: there is no intrinsic matching at a^2 (NNLO);",
    "  without one, heavy quark = heavy antiquark at the threshold",
    "downwards at a threshold: the exact inverse of the upward step; an intrinsic heavy density (what the",
    "  light densities do not make) goes back to the order kept in a, so that nothing is enlarged",
    "mu_r differs from mu_f: splitting functions re-expanded in a(mu_r); nf of the coupling is that of mu_f",
    "the same bits on one kind of CPU, whatever the number of threads; 1e-12 of each other between kinds",
)

_RULES_TEXT = "\n".join(["Conventions", *(f"  {rule}" for rule in _RULES)])
