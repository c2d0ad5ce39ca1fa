"""Integrals along a bar: flexibility, and the lever of a distributed load.

For a bar with modulus E and area A(x), of force N(x) = N_start - q x and free lengthening e0, the elongation is
``e = f N_start - q g + e0`` with ``f = int dx/(E A)`` and ``g = int x dx/(E A)``. Closed forms by elementary
integration, for an area that varies linearly and for a round bar whose diameter does.
"""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Flags, Floats
from xlaxial.model.network import Bars

_NEAR = 0.3  # below this relative taper the series is used: the closed forms lose digits there
_TERMS = 34  # 0.3 ** 34 is below the last digit


def flexibility(bars: Bars) -> Floats:
    """Return the flexibility of each bar, (n_bars,) m/N."""
    return integrals(bars, bars.length, bars.area_end)[0]


def load_lever(bars: Bars) -> Floats:
    """Return int x dx/(E A) of each bar, (n_bars,) m2/N."""
    return integrals(bars, bars.length, bars.area_end)[1]


def integrals(bars: Bars, x: Floats, area: Floats) -> tuple[Floats, Floats]:
    """Integrals of 1/(E A) and x/(E A) from the bars' starts to x.

    Parameters
    ----------
    bars : Bars
        The bars.
    x : Floats
        (n_bars,) m from each bar's start.
    area : Floats
        (n_bars,) m2, area at x (see `area_at`).

    Returns
    -------
    tuple of Floats
        (n_bars,) m/N and (n_bars,) m2/N.
    """
    first = x / (bars.modulus * bars.area_start)
    second = 0.5 * x * first
    tapered = area != bars.area_start
    if tapered.any():
        at = np.flatnonzero(tapered)
        round_ = bars.round_taper[at]
        ratio = area[at] / bars.area_start[at]
        ratio = np.where(round_, np.sqrt(ratio), ratio)
        t = (area[at] - bars.area_start[at]) / bars.area_start[at]
        t = np.where(round_, t / (1.0 + ratio), t)  # root of (1 + t) less 1, without cancellation
        second[at] = x[at] * first[at] * _second(t, round_)
        first[at] *= _first(t, round_)
    return first, second


def _first(t: Floats, round_: Flags) -> Floats:
    """Mean of A_start/A over the length, t the relative growth of area or diameter."""
    return np.where(round_, 1.0 / (1.0 + t), np.log1p(t) / t)


def _second(t: Floats, round_: Flags) -> Floats:
    """Mean of (x/L) A_start/A over the length."""
    near = np.abs(t) < _NEAR
    powers = np.arange(_TERMS)
    signs = np.where(powers % 2, -1.0, 1.0)
    small = np.where(near, t, 0.0)
    linear = np.polynomial.polynomial.polyval(small, signs / (powers + 2))
    rounded = np.polynomial.polynomial.polyval(small, signs * (powers + 1) / (powers + 2))
    wide = np.where(near, 1.0, t)
    log = np.log1p(wide)
    return np.where(
        near,
        np.where(round_, rounded, linear),
        np.where(round_, log - wide / (1.0 + wide), wide - log) / wide**2,
    )


def area_at(bars: Bars, x: Floats) -> Floats:
    """Return the area at x, (n_bars,) m2, exact at both ends."""
    uniform = bars.area_start == bars.area_end
    if uniform.all():
        return bars.area_start
    part = x / bars.length
    linear = bars.area_start * (1.0 - part) + bars.area_end * part
    root = np.sqrt(bars.area_start) * (1.0 - part) + np.sqrt(bars.area_end) * part
    area = np.where(bars.round_taper, root**2, linear)
    area = np.where(part == 1.0, bars.area_end, area)
    return np.where(uniform | (part == 0.0), bars.area_start, area)
