"""Functions of spreadsheets that the engine lacks, in the engine's own terms: matrices and summaries."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeAlias

import numpy as np
import numpy.typing as npt

from xlaxial.hosts.headless.aggregate import aggregate

Matrix: TypeAlias = npt.NDArray[np.float64]
_VALUE = {"type": "Error", "kind": "Value"}
_NUM = {"type": "Error", "kind": "Num"}


def _matrix(block: Any) -> Matrix | None:
    """Return a block of numbers; None where a cell holds anything else."""
    rows = block if isinstance(block, list) else [[block]]
    if any(isinstance(cell, bool) or not isinstance(cell, (int, float)) for row in rows for cell in row):
        return None
    return np.array(rows, dtype=np.float64)


def _error_in(*blocks: Any) -> Any:
    """Return the first error value of some blocks, #VALUE! where there is none."""
    for block in blocks:
        for row in block if isinstance(block, list) else [[block]]:
            for cell in row:
                if isinstance(cell, dict):
                    return cell
    return _VALUE


def mmult(left: Any, right: Any) -> Any:
    """Return the product of two matrices; #VALUE! where their sizes do not fit or a cell is no number."""
    a, b = _matrix(left), _matrix(right)
    if a is None or b is None:
        return _error_in(left, right)
    return (a @ b).tolist() if a.shape[1] == b.shape[0] else _VALUE


def minverse(block: Any) -> Any:
    """Return the inverse of a square matrix; #NUM! where it is singular."""
    a = _matrix(block)
    if a is None or a.shape[0] != a.shape[1]:
        return _error_in(block)
    try:
        inverse = np.linalg.inv(a)
    except np.linalg.LinAlgError:
        return _NUM
    return inverse.tolist() if np.isfinite(inverse).all() else _NUM


def mdeterm(block: Any) -> Any:
    """Return the determinant of a square matrix."""
    a = _matrix(block)
    return _error_in(block) if a is None or a.shape[0] != a.shape[1] else float(np.linalg.det(a))


SUPPLIED: dict[str, Callable[..., Any]] = {
    "MMULT": mmult,
    "MINVERSE": minverse,
    "MDETERM": mdeterm,
    "AX__AGGREGATE": aggregate,
}
