"""Tridiagonal stiffness: bars join only neighbours, so that all chains of a table are factorised at once."""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Floats


class Tridiagonal:
    """Factors of a symmetric positive definite tridiagonal matrix (LAPACK dpttrf)."""

    def __init__(self) -> None:
        self._diagonal = self._beside = np.zeros(0)

    def factor(self, diagonal: Floats, coupling: Floats) -> int:
        """Factorise; both arrays are overwritten.

        Parameters
        ----------
        diagonal : Floats
            (n,) N/m.
        coupling : Floats
            (n - 1,) N/m, minus the stiffness between neighbours.

        Returns
        -------
        int
            0, or the number, from 1, of the node whose pivot is not positive.
        """
        if diagonal.size == 1:
            self._diagonal = diagonal
            return 0 if diagonal[0] > 0.0 else 1
        from scipy.linalg.lapack import dpttrf

        self._diagonal, self._beside, failed = dpttrf(diagonal, coupling, overwrite_d=1, overwrite_e=1)
        return int(failed)

    def solve(self, rows: Floats) -> None:
        """Solve in place, (n_cases, n) N to m."""
        if rows.shape[1] == 1:
            rows /= self._diagonal
            return
        from scipy.linalg.lapack import dpttrs

        dpttrs(self._diagonal, self._beside, rows.T, overwrite_b=1)
