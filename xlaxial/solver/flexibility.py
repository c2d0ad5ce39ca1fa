"""Integrals along a bar: flexibility, and the lever of a distributed load.

For a bar with modulus E and area A(x), of force N(x) = N_start - q x and free lengthening e0, the elongation is
``e = f N_start - q g + e0`` with ``f = int dx/(E A)`` and ``g = int x dx/(E A)``. Closed forms by elementary
integration, for an area that varies linearly (f = L ln(A2/A1) / (E (A2 - A1))) and for a round bar whose diameter
does (f = L / (E sqrt(A1 A2))).

Both logarithmic forms lose digits where the two ends are nearly alike. With z = (a2 - a1)/(a2 + a1), a the area or
the diameter, ln(a2/a1) = 2 artanh z, and the terms that cancel are struck out of the series of artanh.
"""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Bars
from xlaxial.solver.layout import CHUNK

_NEAR = 0.5  # |z| up to which the series is used; beyond, the closed forms lose less than their last digit but one
_TERMS = 27  # 0.5 ** 54 is below the last digit


def flexibility(bars: Bars) -> Floats:
    """Return the flexibility of each bar, (n_bars,) m/N."""
    tapered = _tapered(bars, bars.area_end)
    out = bars.modulus * bars.area_start
    np.divide(bars.length, out, out=out)
    if tapered.size:
        out[tapered] *= _means(bars.area_start[tapered], bars.area_end[tapered], bars.round_taper[tapered])[0]
    return out


def stiffness(bars: Bars) -> Floats:
    """Return the stiffness of each bar, 1/f, (n_bars,) N/m."""
    tapered = _tapered(bars, bars.area_end)
    out = np.empty_like(bars.length)
    for a in range(0, out.size, CHUNK):
        part = slice(a, a + CHUNK)
        np.multiply(bars.modulus[part], bars.area_start[part], out=out[part])
        out[part] /= bars.length[part]
    if tapered.size:
        out[tapered] /= _means(bars.area_start[tapered], bars.area_end[tapered], bars.round_taper[tapered])[0]
    return out


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
    tapered = _tapered(bars, area)
    if tapered.size:
        means = _means(bars.area_start[tapered], area[tapered], bars.round_taper[tapered])
        second[tapered] = x[tapered] * first[tapered] * means[1]
        first[tapered] *= means[0]
    return first, second


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


def some_bars(bars: Bars, at: Ints) -> Bars:
    """Return some of the bars, in the order of `at`."""
    return Bars(**{name: getattr(bars, name)[at] for name in Bars.__dataclass_fields__})


def _tapered(bars: Bars, area: Floats) -> Ints:
    """Bars whose area differs from that at their start."""
    if area is bars.area_start:
        return np.zeros(0, dtype=np.int64)
    return np.flatnonzero(area != bars.area_start)


def _means(start: Floats, end: Floats, round_: Flags) -> tuple[Floats, Floats]:
    """Means over the length of A_start/A and of (x/L) A_start/A, (n,) each.

    With t = end/start - 1 of area or diameter: linear ln(1 + t)/t and (t - ln(1 + t))/t**2; round 1/(1 + t) and
    (ln(1 + t) - t/(1 + t))/t**2.
    """
    apart = np.sqrt(start) + np.sqrt(end)
    z = np.where(round_, (end - start) / apart**2, (end - start) / (end + start))
    near = np.abs(z) <= _NEAR
    z = np.where(near, z, 0.0)
    rest = _artanh_rest(z)  # artanh z = z + z**3 rest
    half = 0.5 * (1.0 - z)
    first_near = (1.0 - z) * (1.0 + z * z * rest)
    second_near = np.where(round_, half * (1.0 - z) * (1.0 / (1.0 + z) + z * rest), half * (1.0 - (1.0 - z) * z * rest))
    ratio = np.where(near, 2.0, end / start)
    log = np.log(ratio)
    ratio = np.where(round_, np.sqrt(ratio), ratio)
    log = np.where(round_, 0.5 * log, log)
    t = ratio - 1.0
    first = np.where(round_, np.sqrt(start / end), np.where(near, first_near, log / t))
    second_far = np.where(round_, log - t / ratio, t - log) / t**2
    return first, np.where(near, second_near, second_far)


def _artanh_rest(z: Floats) -> Floats:
    """Sum of z**(2 j) / (2 j + 3)."""
    square = z * z
    out = np.zeros_like(z)
    for j in range(_TERMS - 1, -1, -1):
        out *= square
        out += 1.0 / (2 * j + 3)
    return out
