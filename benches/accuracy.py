"""How large the errors are: kernels, published tables, evolution, interpolation, sum rules.

Evolution is compared with the Mellin-space solution of `tests/mellin`, which shares nothing with it but the
kernels, at every x of the published tables (1e-7 to 0.9), from 2 to 1e4 GeV^2.

    python benches/accuracy.py                     the tables, as Markdown
    python benches/accuracy.py --write FILE        the same into a file
    python benches/accuracy.py --json | --small    for run.py, and for the tests

The errors are those of `tests/evolution/cases.py`: relative to the value, or to that at LO where this is
larger (heavy quarks change sign near x = 0.9 beyond LO); rounding of stored flavours is taken off.
"""

from __future__ import annotations

import argparse
import itertools
import json
import sys
from collections.abc import Iterator
from dataclasses import asdict, replace
from pathlib import Path

import numpy as np
import scalewright as sw
from figures import Figure, check, table

ROOT = Path(__file__).resolve().parents[1]
sys.path.insert(0, str(ROOT / "tests"))

from evolution import cases  # noqa: E402
from evolution.wider_class import inputs  # noqa: E402
from kernels.second_writing.matching import matching  # noqa: E402
from kernels.second_writing.splitting_nnlo import splitting  # noqa: E402
from mellin.published import TABLES, last_digit  # noqa: E402
from scalewright.kernels import CHANNELS, ELEMENTS  # noqa: E402

GOALS = {"standard": 1e-7, "fine": 1e-9}
WIDER_GOALS = {"standard": 1e-6, "fine": 1e-8}
#: Whatever is worse than this multiple of its goal is a wrong answer, not a poor one.
WRONG = 1e3
NAMES = {
    "x*u_v": "u_v",
    "x*d_v": "d_v",
    "x*(dbar-ubar)": "dbar - ubar",
    "2*x*(dbar+ubar)": "2*dbar + 2*ubar",
    "x*(s-sbar)": "s_v",
    "x*(s+sbar)": "s+",
    "x*(c+cbar)": "c+",
    "x*(b+bbar)": "b+",
    "x*g": "g",
}
WIDER_X = np.array([1e-7, 1e-5, 1e-3, 0.05, 0.2, 0.35, 0.5, 0.65, 0.8, 0.9])
SETTINGS = {
    "nf = 4": {"flavours": (4, 4)},
    "nf = 3 to 5": {},
    "nf = 3 to 5, mu_r^2 = mu_f^2/2": {"kappa": 0.5},
    "nf = 3 to 5, mu_r^2 = 2 mu_f^2": {"kappa": 2.0},
    "nf = 3 to 5, thresholds at 1.5 m^2": {"ratio": 1.5},
    "nf = 3 to 5, thresholds at 1.5 m(m)^2": {"ratio": 1.5, "kind": "msbar"},
}


def shown(found: dict[str, np.ndarray], x: np.ndarray) -> str:
    """Return the worst error with its quantity and x."""
    error, name, where = cases.worst(found)
    return f"{error:.1e} ({name} at x = {x[where]:g})"


def kernels(small: bool) -> Iterator[Figure]:
    """Compare the compiled kernels with the second writing, relative to value plus largest in the bulk.

    1 - z from 1e-3 on: nearer to 1 the second writing of P_ns^(1) and P_gg^(1) loses digits.
    """
    small_z, small_rest = np.geomspace(1e-7, 0.5, 400), np.geomspace(1e-3, 0.5, 400)
    z = np.concatenate([small_z, 1.0 - small_rest])
    rest = np.concatenate([1.0 - small_z, small_rest])
    bulk = (z > 0.01) & (rest > 0.01)

    def off(compiled: sw.kernels.KernelValues, second) -> float:
        expected = second.regular(z, rest)
        size = np.abs(expected) + np.max(np.abs(expected[bulk]))
        return float(np.max(np.abs(compiled.regular - expected) / np.where(size > 0.0, size, 1.0)))

    splittings = max(
        off(sw.splitting_function(c, z, order=cases.ORDERS[k], nf=4, one_minus_z=rest), splitting(k, c, 4))
        for c in CHANNELS
        for k in range(3)
    )
    check("splitting functions", splittings, 1e-9)
    yield Figure("splitting functions against their second writing, 800 z", f"{splittings:.0e}", "1e-12")
    elements = max(
        off(
            sw.matching_element(e, z, order=cases.ORDERS[k], power_of_log=power, kind=kind, one_minus_z=rest),
            matching(k, e, power, kind, "exact"),
        )
        for e, k, power, kind in itertools.product(ELEMENTS, (1, 2), (0, 1, 2), ("pole", "msbar"))
    )
    check("matching elements", elements, 1e-9)
    yield Figure("matching elements against their second writing, 800 z", f"{elements:.0e}", "1e-12")


def published(small: bool) -> Iterator[Figure]:
    """Compare with every table of the published benchmark, standard resolution."""
    for entry in TABLES[-1:] if small else TABLES:
        case = cases.Case(entry.order, entry.flavours, start_nf=entry.start_nf, form="compact")
        end = case.operators(cases.grid()).apply(case.start(cases.grid())).scale(case.q2)
        rows = entry.rows()
        units = [abs(end.at(None, x, NAMES[name])[0] - value) / last_digit(value) for x, name, value in rows]
        check(entry.name, max(units), 1.0)
        what = f"published table {entry.name}: {len(rows)} numbers"
        yield Figure(what, f"off by at most {max(units):.2f} of the last digit", "1")


def evolution(small: bool) -> Iterator[Figure]:
    """Compare the published input at 1e4 GeV^2 with the Mellin-space solution."""
    x = cases.PUBLISHED_X
    bare = dict.fromkeys(GOALS, (0.0, ""))
    for order, (words, settings) in itertools.product((2,) if small else (0, 1, 2), SETTINGS.items()):
        if (settings.get("kind") == "msbar" and order < 2) or (small and settings):
            continue
        case = cases.Case(order, **settings)
        for resolution, goal in GOALS.items():
            on = cases.grid(resolution)
            what = f"{cases.ORDERS[order]}, {words}, {resolution} ({on.nodes} nodes)"
            end = case.operators(on).apply(case.start(on)).scale(case.q2)
            found = cases.errors(case, end, x)
            check(what, cases.worst(found)[0], WRONG * goal)
            yield Figure(what, shown(found, x), f"{goal:.0e}")
            alone = cases.errors(case, end, x, floored=False)
            bare[resolution] = max(bare[resolution], (cases.worst(alone)[0], shown(alone, x)))
    for resolution, goal in GOALS.items():
        what = f"the largest of these relative to the value alone, {resolution}"
        yield Figure(what, bare[resolution][1], f"{goal:.0e}")


def wider(small: bool) -> Iterator[Figure]:
    """Compare x^a (1-x)^b (1 + c sqrt x + d x), a = -0.4 to 0.8, b = 1.5 to 10: corners and mixtures."""
    for order, (resolution, goal) in itertools.product((2,) if small else (0, 1, 2), WIDER_GOALS.items()):
        base, on = cases.Case(order), cases.grid(resolution)
        operators, worst = base.operators(on), {}
        for densities in inputs(random=0 if small else 4):
            case = replace(base, densities=densities)
            end = operators.apply(case.start(on)).scale(case.q2)
            for name, errors in cases.errors(
                case, end, WIDER_X, ("g", "u", "ubar", "dbar", "s", "c+", "b+")
            ).items():
                worst[name] = np.maximum(worst.get(name, 0.0), errors)
        what = f"{cases.ORDERS[order]}, wider class of inputs, {resolution}"
        check(what, cases.worst(worst)[0], WRONG * goal)
        yield Figure(what, shown(worst, WIDER_X), f"{goal:.0e}")


def sum_rules(small: bool) -> Iterator[Figure]:
    """Follow momentum and the numbers of quarks to 1e4 GeV^2, what is below x_min included."""
    for order, resolution in itertools.product((2,) if small else (0, 1, 2), GOALS):
        case, on = cases.Case(order), cases.grid(resolution)
        start = case.start(on)
        end = case.operators(on).apply(start).scale(case.q2)
        momentum = abs(end.momentum()[0] - start.momentum()[0])
        number = max(abs(end.number(q)[0] - (start.number(q)[0] if q < 4 else 0.0)) for q in range(1, 6))
        check("momentum", momentum, 1e-5)
        goal = f"{GOALS[resolution]:.0e}" if order < 2 else "as the kernels"
        what = f"{cases.ORDERS[order]}, {resolution}: change of momentum; of the numbers of quarks"
        yield Figure(what, f"{momentum:.0e}; {number:.0e}", goal)


def measure(small: bool) -> list[Figure]:
    """Return all tables in one."""
    parts = (kernels, published, evolution, wider, sum_rules)
    return [figure for part in parts for figure in part(small)]


def main() -> None:
    """Run as a command."""
    parser = argparse.ArgumentParser(
        description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter
    )
    parser.add_argument("--small", action="store_true", help="NNLO alone, for its answer")
    parser.add_argument("--json", action="store_true", help="print the figures as JSON")
    parser.add_argument("--write", metavar="FILE", type=Path, help="write the tables as Markdown")
    options = parser.parse_args()
    figures = measure(options.small)
    if options.write:
        options.write.write_text(table(figures) + "\n", encoding="utf-8")
    print(json.dumps([asdict(figure) for figure in figures]) if options.json else table(figures))


if __name__ == "__main__":
    main()
