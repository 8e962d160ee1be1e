"""Densities in words: one line, one screen, one table. Printing computes nothing and never raises."""

from __future__ import annotations

import html
from typing import TYPE_CHECKING

from ._check import show, show_all
from .flavours import flavour_name

if TYPE_CHECKING:
    from ._questions import Questions


def line(of: Questions) -> str:
    """Return one line."""
    replicas = _count(of.replicas, "replica")
    flavours = _count(len(of.flavours), "flavour")
    if of._one:
        where = f"q2={show(of.q2)} GeV^2, nf={of.nf}"
    else:
        where = f"{_count(of.scales, 'scale')}, q2={show_all(of._q2, most=2)} GeV^2"
    return f"Densities({replicas}, {flavours}, {where}, {of.grid.nodes} nodes)"


def rows(of: Questions) -> list[tuple[str, str]]:
    """Return what there is to say, as (name, value)."""
    return [
        ("q2", f"{show_all(of._q2)} GeV^2"),
        ("nf", show_all(of._nf)),
        ("replicas", str(of.replicas)),
        ("flavours", ", ".join(flavour_name(number) for number in of.flavours)),
        ("grid", repr(of.grid)),
        ("values", f"x f(x), {of.values.nbytes / 1e6:.3g} MB"),
        ("below x_min", "unknown" if of.below is None else "momentum and quark numbers known"),
    ]


def screen(of: Questions) -> str:
    """Return one screen."""
    return "\n".join(["Densities", *(f"  {name:<12}{value}" for name, value in rows(of))])


def table(of: Questions) -> str:
    """Return an HTML table."""
    cells = (
        f"<tr><th style='text-align:left'>{html.escape(name)}</th><td>{html.escape(value)}</td></tr>"
        for name, value in rows(of)
    )
    return f"<table><caption>Densities</caption>{''.join(cells)}</table>"


def _count(number: int, noun: str) -> str:
    """Return "1 replica", "2 replicas"."""
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"
