"""One page of HTML that says all about a fit, with nothing outside itself."""

from scalewright.report.fit import fit_report

__all__ = ["fit_report"]
