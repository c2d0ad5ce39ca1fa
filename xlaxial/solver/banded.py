"""Banded stiffness: networks renumbered so that bars reach few nodes far."""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Floats, Ints


class Banded:
    """Cholesky factors of a symmetric positive definite banded matrix (LAPACK dpbtrf).

    Parameters
    ----------
    i, j : Ints
        (n_bars,) rows that each bar couples.
    reach : int
        Largest distance between them.
    """

    def __init__(self, i: Ints, j: Ints, reach: int) -> None:
        self._reach = reach
        self._row, self._column = np.abs(i - j), np.minimum(i, j)
        self._factors: Floats = np.zeros((0, 0))

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
            0, or the number, from 1, of the row whose pivot is not positive.
        """
        from scipy.linalg.lapack import dpbtrf

        band = np.zeros((self._reach + 1, diagonal.size), order="F")
        band[0] = diagonal
        np.add.at(band, (self._row, self._column), coupling)
        self._factors, failed = dpbtrf(band, lower=1, overwrite_ab=1)
        return int(failed)

    def solve(self, rows: Floats) -> None:
        """Solve in place, (n_cases, n) N to m."""
        from scipy.linalg.lapack import dpbtrs

        dpbtrs(self._factors, rows.T, lower=1, overwrite_b=1)
