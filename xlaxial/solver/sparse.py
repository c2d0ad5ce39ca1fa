"""Sparse stiffness: networks in which bars reach far, whatever the numbering."""

from __future__ import annotations

from typing import Any

import numpy as np

from xlaxial.arrays import Floats, Ints


class Sparse:
    """Factors of a sparse symmetric matrix (SciPy's SuperLU, in its symmetric mode).

    Parameters
    ----------
    i, j : Ints
        (n_bars,) rows that each bar couples.
    size : int
        Number of rows.
    """

    def __init__(self, i: Ints, j: Ints, size: int) -> None:
        own = np.arange(size)
        self._at = (np.concatenate([own, i, j]), np.concatenate([own, j, i]))
        self._size = size
        self._factors: Any = None

    def factor(self, diagonal: Floats, coupling: Floats) -> int:
        """Factorise.

        Parameters
        ----------
        diagonal : Floats
            (n,) N/m.
        coupling : Floats
            (n_bars,) N/m, minus the stiffness of each bar.

        Returns
        -------
        int
            0, or the number, from 1, of a row whose pivot is not positive.
        """
        from scipy.sparse import coo_array
        from scipy.sparse.linalg import splu

        values = np.concatenate([diagonal, coupling, coupling])
        matrix = coo_array((values, self._at), shape=(self._size, self._size)).tocsc()
        try:
            self._factors = splu(
                matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True}
            )
        except RuntimeError:  # exactly singular; which row is not told
            return self._weakest(diagonal, coupling)
        pivots = self._factors.U.diagonal()
        if (pivots > 0.0).all():
            return 0
        return int(np.flatnonzero(self._factors.perm_c == int(np.argmin(pivots)))[0]) + 1

    def _weakest(self, diagonal: Floats, coupling: Floats) -> int:
        """Row whose ground stiffness is the least part of its diagonal, from 1."""
        ground = diagonal.copy()
        np.add.at(ground, self._at[0][self._size :], np.append(coupling, coupling))
        return int(np.argmin(ground / np.where(diagonal > 0.0, diagonal, 1.0))) + 1

    def solve(self, rows: Floats) -> None:
        """Solve in place, (n_cases, n) N to m."""
        rows[:] = self._factors.solve(np.ascontiguousarray(rows.T)).T
