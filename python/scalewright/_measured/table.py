"""One table of measurements: its description, its lines as text, its matrices, and what they mean.

Everything follows from these three, so a table that is written and read again is the same table; cuts and new
values change the three and read them anew.
"""

from __future__ import annotations

import copy
from collections.abc import Mapping, Sequence
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from .._check import Floats, show
from ..errors import InputError
from ..files.cells import Cells
from ..files.toml import Section
from . import correlated as _correlated
from .assembly import Assembly, assemble
from .correlated import Correlated
from .description import KEYS, choice, columns_of, sections, uncertainty_of
from .uncertainty import Uncertainty

__all__ = ["Table"]

_COVARIANCE = ("name", "file", "kind", "given_in", "scales_with", "of", "repair")


class Table:
    """One table.

    Parameters
    ----------
    description : mapping
        As TOML has it.
    cells : Cells
        The lines.
    matrices : sequence of ndarray, (datum, datum)
        One for each ``[[covariance]]``, as in its file.
    file : str
        Where the description is from, for messages.
    moved : sequence of float
        What a repair has done to each matrix already, before this table was cut out of a larger one.
    """

    def __init__(
        self, description: Mapping[str, Any], cells: Cells, matrices: Sequence[Floats], file: str,
        moved: Sequence[float] = (),
    ) -> None:  # fmt: skip
        self.description, self.cells, self.file = copy.deepcopy(dict(description)), cells, file
        self.matrices, self._moved = tuple(matrices), tuple(moved) or (0.0,) * len(matrices)
        section = Section(self.description, file).only(*KEYS)
        self.title = str(section.text("title"))
        self.unit = str(section.text("unit", "1"))
        section.text("note", None)
        self.columns = columns_of(section, cells)
        self.assembly: Assembly = assemble(section, cells, self.columns)
        self.data_cells = cells.select(self.assembly.lines)
        printed = self.data_cells.numbers(self.columns["value"])
        found = [
            uncertainty_of(part, self.data_cells, printed, self.title)
            for part in sections(section, "uncertainty")
        ]
        self._refuse_same_names(found)
        self.described: tuple[Uncertainty, ...] = tuple(found)
        # where errors are asymmetric, the value may not be the printed one
        self.value = printed + sum((part.offset for part in found), np.zeros_like(printed))
        self.uncertainties, self.correlated = self._with_matrices(section, found, printed)
        self._refuse_no_error()

    def __len__(self) -> int:
        return len(self.assembly.lines)

    def __eq__(self, other: object) -> bool:
        """Say whether description, lines and matrices are the same; file names do not count."""
        if not isinstance(other, Table):
            return NotImplemented
        same = self._nameless == other._nameless and self.cells == other.cells
        return same and all(np.array_equal(a, b) for a, b in zip(self.matrices, other.matrices, strict=True))

    __hash__ = None  # type: ignore[assignment]

    @cached_property
    def _nameless(self) -> dict[str, Any]:
        """The description without names of files."""
        plain = {key: value for key, value in self.description.items() if key != "points"}
        parts = plain.get("covariance", [])
        return plain | {"covariance": [{k: v for k, v in p.items() if k != "file"} for p in parts]}

    @property
    def unused(self) -> tuple[str, ...]:
        """Columns that no key names."""
        used = set(self.columns.values())
        for part in self.description.get("uncertainty", []):
            used |= {part.get(key) for key in ("column", "up", "down")}
        return tuple(name for name in self.cells.head if name not in used)

    def place(self, datum: int) -> str:
        """Return where a datum stands."""
        return self.data_cells.place(datum)

    def kept(self, keep: NDArray[np.bool_]) -> Table:
        """Return the table of some of its data."""
        if keep.all():
            return self
        description = copy.deepcopy(self.description)
        lines = self.assembly.needed(keep)
        label = self.columns.get("label")
        blank = {self.assembly.lines[datum] for datum in np.flatnonzero(~keep)} & set(lines)
        value = [
            "" if line in blank else entry for line, entry in enumerate(self._column(self.columns["value"]))
        ]
        if "datum" in description and label is not None:
            left = {self.cells.words(label)[line] for line in lines} - {""}
            left -= {self.cells.words(label)[line] for line in blank}
            description["datum"] = [part for part in description["datum"] if part["label"] in left]
        cells = self.cells.replaced({self.columns["value"]: value}).select(lines)
        matrices = [matrix[np.ix_(keep, keep)] for matrix in self._mended()]
        return Table(description, cells, matrices, self.file, [part.moved for part in self.correlated])

    def _mended(self) -> list[Floats]:
        """Return the matrices, those that were repaired as the repair left them.

        Repaired anew, what is left after a cut would have other correlations than it had before.
        """
        result = []
        for matrix, part in zip(self.matrices, self.correlated, strict=True):
            size = np.sqrt(np.diagonal(matrix))
            result.append(size[:, None] * part.matrix * size if part.moved else matrix)
        return result

    def _column(self, name: str) -> list[str]:
        place = self.cells.index(name)
        return [row[place] for row in self.cells.rows]

    def _refuse_same_names(self, found: Sequence[Uncertainty]) -> None:
        names = [part.name for part in found]
        for place, name in enumerate(names):
            if name in names[:place]:
                raise InputError(
                    f"{self.file}: [uncertainty {place + 1}]: {show(name)} is uncertainty "
                    f"{names.index(name) + 1} already; give it a name of its own"
                )

    def _with_matrices(
        self, section: Section, found: list[Uncertainty], printed: Floats
    ) -> tuple[tuple[Uncertainty, ...], tuple[Correlated, ...]]:
        """Return the uncertainties that no matrix correlates, and those that one does."""
        parts = sections(section, "covariance")
        if len(parts) != len(self.matrices):
            raise InputError(f"{self.file}: {len(parts)} [[covariance]] for {len(self.matrices)} matrices")
        correlated = []
        for part, matrix, before in zip(parts, self.matrices, self._moved, strict=True):
            part.only(*_COVARIANCE)
            if matrix.shape != (len(self), len(self)):
                shape = " x ".join(map(str, matrix.shape))
                raise InputError(f"{part.where('file')}: {shape} numbers for {len(self)} data")
            correlated.append(self._matrix(part, matrix, before, found, printed))
        return tuple(found), tuple(correlated)

    def _matrix(
        self, part: Section, matrix: Floats, before: float, found: list[Uncertainty], printed: Floats
    ) -> Correlated:
        """Return what one matrix says; the uncertainty that it correlates is taken out of `found`."""
        name = str(part.text("name", None) or part.text("file"))
        kind = choice(part, "kind", ("covariance", "correlation"))
        repair = choice(part, "repair", _correlated.REPAIRS, default=None)
        size, correlations = _correlated.correlations(
            matrix, lambda row: f"{name}: row {row + 1}", repair=repair
        )
        if kind == "correlation":
            for key in ("given_in", "scales_with"):
                if part.get(key, None) is not None:
                    raise InputError(f'{part.where(key)}: goes with kind = "covariance"; of says it here')
            off = np.flatnonzero(np.abs(size - 1.0) > 1e-6)  # rounding in print leaves a 1 a 1
            for row in off[:1]:
                raise InputError(
                    f"{name}: row {row + 1}: {show(matrix[row, row])} on the diagonal: must be 1"
                )
            of = self._taken(part, found)
            size, multiplicative = of.size, of.multiplicative
        else:
            if part.get("of", None) is not None:
                raise InputError(f'{part.where("of")}: goes with kind = "correlation"')
            multiplicative = choice(part, "scales_with", ("nothing", "value")) == "value"
            if choice(part, "given_in", ("value", "percent")) == "percent":
                size = size / 100.0 if multiplicative else size / 100.0 * printed
            elif multiplicative:
                for row in np.flatnonzero((printed == 0.0) & (size != 0.0))[:1]:
                    raise InputError(f"{self.place(row)}: {name} scales with the value, which is 0")
                size = size / np.where(printed == 0.0, 1.0, printed)
        mended, moved = _correlated.repaired(correlations, repair, name)
        return Correlated(name, size, mended, multiplicative, max(moved, before))

    def _taken(self, part: Section, found: list[Uncertainty]) -> Uncertainty:
        """Take the uncertainty that a correlation matrix is of out of the list."""
        of = part.text("of")
        for place, uncertainty in enumerate(found):
            if uncertainty.name == of:
                if uncertainty.source is not None:
                    raise InputError(f"{part.where('of')} = {show(of)}: is one source for all data already")
                return found.pop(place)
        names = ", ".join(show(uncertainty.name) for uncertainty in found)
        raise InputError(f"{part.where('of')} = {show(of)}: no such uncertainty; there are {names or 'none'}")

    def _refuse_no_error(self) -> None:
        """Refuse a datum without any uncertainty."""
        parts: list[Uncertainty | Correlated] = [*self.uncertainties, *self.correlated]
        sizes = [part.size for part in parts]
        none = ~np.any([size != 0.0 for size in sizes], axis=0) if sizes else np.ones(len(self), bool)
        for datum in np.flatnonzero(none)[:1]:
            raise InputError(f"{self.place(datum)}: the datum has no uncertainty at all")
