"""Sections of a report about the data: tables, data against prediction, pulls, shifts of common sources."""

from __future__ import annotations

import numpy as np

from . import figures
from .page import Page
from .told import Told


def tables(page: Page, told: Told) -> None:
    """List the tables with their chi-squares, and what was read and cut."""
    page.section("Data")
    parts = told.chi_square.per_table(told.prediction)
    rows = [
        [
            part.title,
            str(part.data),
            f"{part.alone:.1f}",
            f"{part.alone / part.data:.2f}",
            f"{part.share:.1f}",
        ]
        for part in parts
    ]
    rows.append(["all", str(told.result.data), "", f"{told.result.chi2 / told.result.data:.2f}",
                 f"{told.result.chi2:.1f}"])  # fmt: skip
    head = ["table", "data", "chi-square alone", "per datum", "share of the total"]
    page.table(head, rows)
    page.say(
        "Alone: nothing known of the other tables. Share: the part of the total; shares add up, and one may "
        "be negative where tables have common sources."
    )
    page.heading("What was read")
    page.verbatim(told.chi_square.measurements.describe())


def against_prediction(page: Page, told: Told) -> None:
    """Draw data over prediction by Q^2, and the shifts of common sources."""
    page.section("Data against prediction")
    measured = told.chi_square.measurements
    if told.pictures:
        from ..plot_data import data_figure

        for title in measured.tables:
            drawn = data_figure(measured, told.prediction, table=title, chi_square=told.chi_square)
            words = f"{title}: data over prediction; open as measured, full after the best-fit shifts"
            page.figure(drawn, words, dots=True)
    names = told.chi_square.names_of_sources
    if not names:
        page.say("The tables have no common sources of uncertainty.")
        return
    page.heading("Common sources of uncertainty")
    shifts = np.ravel(told.chi_square.shifts(told.prediction))
    if told.pictures:
        page.figure(figures.shifts_figure(told.chi_square, told.prediction), "best-fit shifts")
    order = np.argsort(-abs(shifts), kind="stable")
    page.table(["source", "shift"], [[names[k], f"{shifts[k]:+.2f}"] for k in order],
               "best-fit shifts in standard deviations")  # fmt: skip


def pulls(page: Page, told: Told) -> None:
    """Draw pulls, and list the largest."""
    page.section("Pulls")
    if told.pictures:
        drawn = figures.pulls_figure(told.chi_square, told.prediction)
        page.figure(drawn, "pulls of all data, beside the normal distribution")
    measured = told.chi_square.measurements
    found = np.ravel(told.chi_square.pulls(told.prediction, shifted=True))
    order = np.argsort(-abs(np.nan_to_num(found)), kind="stable")[:10]
    rows = [
        [measured.tables[measured.table_of[k]], f"{measured.x[k]:g}", f"{measured.q2[k]:g}",
         f"{measured.value[k]:.5g}", f"{told.prediction[k]:.5g}", f"{found[k]:+.2f}"]
        for k in order
    ]  # fmt: skip
    head = ["table", "x", "Q^2 (GeV^2)", "measured", "predicted", "pull after shifts"]
    page.table(head, rows, "the ten largest")
