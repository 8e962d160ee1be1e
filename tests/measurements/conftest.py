"""Small made-up measurements, as files and as columns."""

import pytest
from measurements.tables import CSV, STAT, TOML
from scalewright import Measurements


@pytest.fixture
def run(tmp_path):
    """The table of the face: a description and its points."""
    (tmp_path / "run1.toml").write_text(TOML)
    (tmp_path / "run1.csv").write_text(CSV)
    return tmp_path / "run1.toml"


@pytest.fixture
def make():
    """Make measurements of columns: F2 by photons unless said otherwise."""

    def made(points=None, matrices=(), **changes):
        description = {"title": "A", "measures": "F2", "exchange": "photon", "uncertainty": [STAT]} | changes
        columns = {"x": [0.1, 0.2, 0.3], "q2": [10.0, 20.0, 30.0], "value": [1.0, 2.0, 4.0]}
        columns |= {"stat": [0.1, 0.2, 0.3]} | (points or {})
        description = {key: value for key, value in description.items() if value is not None}
        return Measurements.from_columns(description, columns, matrices)

    return made
