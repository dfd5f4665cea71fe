"""Steady linear mountain waves of a layered column, in displacement form.

The lower boundary is taken apart into wavenumbers; for each, the ratio of
pressure to displacement is carried down from a top that lets waves out, and the
displacement is carried up again from the ground. Nothing grows with the
number of layers, whether waves spread or fade (reflection form).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within
from orolift.flow.spectra import over_transect, spectrum_of

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from orolift.flow.layers import Layers

FRICTION_LENGTH = 80e3
"""Distance [m] in which a trapped wave dies by a factor e: observed lee waves fade over 50 to 100 km; a judgement."""
PADDING = 400e3
"""Level ground [m] added to the transect, five friction lengths, so that nothing wraps round; a judgement."""
SHORTEST_WAVE = (1000.0, 4000.0)
"""Waves [m] shorter than a length between these are not worked out layer by layer: see `waves`; a judgement."""
_FADING = 2.0  # times the largest Scorer wavenumber: waves as short as this fade within 15 % as in neutral air
_FRICTION_SHARE = (
    0.3  # of the Scorer wavenumber: longer waves are not damped; between hydrostatic and trapped, a judgement
)


@dataclass(frozen=True)
class Response:
    """What a column answers to ground of unit height, wavenumber by wavenumber.

    Attributes
    ----------
    displacement : ndarray of complex, shape (..., nl + 1, nk) [1]
        At the edges, over that at the lowest edge.
    impedance : ndarray of complex, shape (..., nl + 1, nk) or (..., 1, nk) [Pa m-1]
        Pressure perturbation over displacement, just above each edge, or the lowest alone.
    """

    displacement: NDArray[np.complex128]
    impedance: NDArray[np.complex128]


@dataclass(frozen=True)
class WaveField:
    """Waves over a transect.

    Attributes
    ----------
    displacement : ndarray, shape (..., nl + 1, n) [m]
        Height of each streamline minus its height upwind; at the lowest edge the boundary itself.
    surface_pressure : ndarray, shape (..., n) [Pa]
        Perturbation along the lowest streamline.
    pressure : ndarray, shape (..., nl + 1, n), or None [Pa]
        Perturbation at all edges, when asked for.
    """

    displacement: NDArray[np.float64]
    surface_pressure: NDArray[np.float64]
    pressure: NDArray[np.float64] | None


def response(
    column: Layers,
    wavenumber: ArrayLike,
    *,
    friction: ArrayLike = 0.0,
    hydrostatic: bool = False,
    aloft: bool = True,
) -> Response:
    """Answer of a column to ground of unit height at given wavenumbers.

    Parameters
    ----------
    column : Layers
    wavenumber : array_like, shape (nk,) [m-1]
        More than 0; complex values (for leaking waves) with a positive real part.
    friction : array_like, shape (nk,) or (..., 1, nk) [1]
        Share by which the wind is made complex, ``U (1 - i friction)``, at least 0: the rate of
        damping over ``k U``.
    hydrostatic : bool
        Leave vertical acceleration out.
    aloft : bool
        Whether the impedance is wanted at all edges, not only at the lowest.

    Returns
    -------
    Response

    Notes
    -----
    ``d/dz(rho U^2 d(eta)/dz) + rho (N^2 - k^2 U^2) eta = 0`` and ``p' = rho U^2 d(eta)/dz``,
    steady linear flow without rotation (Scorer 1949, Smith 1979, written for displacement). Where layers
    have a `compression`, rising air also expands, and ``p' = rho U^2 (d(eta)/dz - g eta / c^2)``: then
    ``eta exp(-G)`` and ``rho exp(2 G)``, G the integral of ``g / c^2``, obey the same equation; so the
    pressure is that of the displaced column summed up hydrostatically.
    In each layer waves go as ``exp(+-imz)``, ``m^2 = N^2/U^2 - k^2``, real m with energy going
    up at the top, imaginary m fading. Pressure and displacement are continuous; across a sharp
    inversion pressure over displacement gains ``rho g'`` downward. Above the last layer
    that carries waves the displacement is left as it is there.

    References
    ----------
    .. [1] R. S. Scorer (1949), "Theory of waves in the lee of mountains",
       Q. J. R. Meteorol. Soc. 75, 41-56.
    .. [2] R. B. Smith (1979), "The influence of mountains on the atmosphere",
       Adv. Geophys. 21, 87-230.

    Examples
    --------
    >>> from orolift.flow.layers import layers
    >>> answer = response(layers([0.0, 3141.593], 1.0, 10.0, 1e-4), [1e-9], hydrostatic=True)
    >>> bool(abs(answer.displacement[1, 0] + 1.0) < 1e-6)  # half a vertical wavelength up: upside down
    True
    """
    k = np.atleast_1d(np.asarray(wavenumber))
    slowing = np.asarray((1.0 - 1j * np.atleast_2d(np.asarray(friction, np.float64))) ** 2, np.complex128)
    count = column.density.shape[-1]
    column, growth = _without_expansion(column)
    jump = _edge_jump(column)[..., None]
    jumps = bool(np.any(jump))
    lead = np.broadcast_shapes(column.density.shape[:-1], slowing.shape[:-2])
    ratio = np.empty((*lead, count + 1, k.size), np.complex128)
    ratio[..., 0, :] = 1.0
    impedance = np.zeros(ratio.shape if aloft else (*lead, 1, k.size), np.complex128)
    above = np.zeros((*lead, k.size), np.complex128)
    stops = column.carrying[..., None]
    highest = {count - 1, *(int(one) - 1 for one in np.unique(stops))}
    for block in _blocks(count, above.size):
        parts = _layer_parts(column, block, k, slowing, hydrostatic)
        for j in range(block.stop - 1, block.start - 1, -1):
            step, plus, minus, square, admittance = (part[..., j - block.start, :] for part in parts)
            if j in highest:  # nothing comes back from above
                last = stops <= j + 1 if j == count - 1 else stops == j + 1
                above = np.where(last, _open_top(column, j, slowing, admittance), above)
                if aloft:
                    impedance[..., j + 1, :] = np.where(last, above, impedance[..., j + 1, :])
            with np.errstate(divide="ignore", invalid="ignore"):  # at the resonance of a column without friction
                share = above * minus
                share += plus
                np.divide(1.0, share, out=share)
                np.multiply(step, share, out=ratio[..., j + 1, :])
                below = above * plus
                below += square
                below *= share
            if aloft or j == 0:
                impedance[..., j, :] = below
            above = below + jump[..., j, :] if jumps else below
    outside = np.arange(count + 1) > stops
    if outside.any():
        ratio[outside] = 1.0
        if aloft:
            impedance[outside] = 0.0
    ratio[..., 1:, :] *= growth[..., None]
    for i in range(1, count + 1):
        ratio[..., i, :] *= ratio[..., i - 1, :]
    if aloft:
        impedance[..., 1:, :] /= np.cumprod(growth, axis=-1)[..., None] ** 2
    return Response(ratio, impedance)


def waves(
    boundary: ArrayLike,
    spacing: float,
    column: Layers,
    *,
    hydrostatic: bool = False,
    friction_length: float = FRICTION_LENGTH,
    padding: float = PADDING,
    shortest: float | None = None,
    all_pressure: bool = False,
    at: NDArray[np.intp] | None = None,
) -> WaveField:
    """Waves over a boundary that ends as high as it starts.

    Parameters
    ----------
    boundary : array_like, shape (..., nx) [m]
        Height above the lowest edge of the column, evenly spaced, wind from the left,
        close to 0 at both ends (a step at an end makes waves too).
    spacing : float [m]
        1 m to 100 km.
    column : Layers
        Leading axes broadcast with those of `boundary`.
    hydrostatic : bool
        Leave vertical acceleration out.
    friction_length : float [m]
        Distance in which trapped waves fade by a factor e; infinity for none.
    padding : float [m]
        Level ground added to the length.
    shortest : float, optional [m]
        Shortest wave worked out layer by layer; each member's own when left out.
    all_pressure : bool
        Also give the pressure at every edge.
    at : ndarray of int, shape (n,), optional
        Numbers of the points at which waves are wanted; all nx of them when left out.

    Returns
    -------
    WaveField

    Raises
    ------
    OutOfRangeError
        If a boundary value is not finite or the spacing is outside its range.

    Notes
    -----
    See `response`. Weak friction keeps trapped waves from going round the periodic
    domain; it acts on waves shorter than about three times ``2 pi U / N``, so that hydrostatic waves
    are not touched. The mean of the padded boundary is carried with the limit of very long waves.
    Waves shorter than half of ``2 pi U / N`` at its smallest in the lowest 5 km (but no longer than 4 km, no shorter
    than 1 km) fade upward almost as in neutral air; they, and those that hold less than a millionth of the
    energy of the boundary, are carried with the fading of the shortest one worked out, so
    that the lowest streamline is exactly the boundary.

    Examples
    --------
    >>> from orolift.flow.layers import layers
    >>> x = np.arange(-300e3, 300e3, 500.0)
    >>> bell = 500.0 / (1.0 + (x / 10e3) ** 2)
    >>> field = waves(bell, 500.0, layers(np.arange(0.0, 12e3, 200.0), 1.2, 10.0, 1e-4), hydrostatic=True)
    >>> bool(abs(field.surface_pressure.min() + 30.0) < 0.3)
    True
    """
    ground = within("boundary", boundary, -9000.0, 9000.0, "m", "Give metres above the lowest edge.")
    step = float(within("spacing", spacing, 1.0, 1e5, "m", "Give metres."))
    spectrum, wavenumber, last, length = spectrum_of(ground, step, padding, shortest or _shortest(column))
    friction = _friction(column, wavenumber, friction_length)
    answer = response(column, wavenumber, friction=friction, hydrostatic=hydrostatic, aloft=all_pressure)
    points = ground.shape[-1] if at is None else at
    line = ground if at is None else ground[..., at]

    known = answer.displacement
    known *= spectrum[..., None, :]
    displacement = over_transect(known, length, points)
    short = line[..., None, :] - displacement[..., :1, :]
    fade = np.exp(-last * (column.edge - column.edge[..., :1]))
    suction = (column.density[..., :1] * column.wind[..., :1] ** 2) * last
    displacement += short * fade[..., None]
    at_ground = over_transect(known[..., 0, :] * answer.impedance[..., 0, :], length, points)
    return WaveField(
        displacement=displacement,
        surface_pressure=at_ground - suction * short[..., 0, :],
        pressure=over_transect(known * answer.impedance, length, points) if all_pressure else None,
    )


def wave_drag(boundary: ArrayLike, spacing: float, surface_pressure: ArrayLike) -> NDArray[np.float64]:
    """Drag of the ground on the air, for each metre across the transect.

    Parameters
    ----------
    boundary : array_like, shape (..., nx) [m]
    spacing : float [m]
    surface_pressure : array_like, shape (..., nx) [Pa]
        Perturbation along the boundary.

    Returns
    -------
    ndarray, shape (...) [N m-1]
        Positive when the ground slows the air.

    Notes
    -----
    Integral of pressure times slope.

    Examples
    --------
    >>> float(wave_drag([0.0, 1.0, 0.0], 1.0, [2.0, 0.0, -2.0]))
    4.0
    """
    slope = np.gradient(np.asarray(boundary, np.float64), spacing, axis=-1)
    return np.asarray(np.sum(np.asarray(surface_pressure) * slope, axis=-1) * spacing)


def _open_top(
    column: Layers, j: int, slowing: NDArray[np.complex128], admittance: NDArray[np.complex128]
) -> NDArray[np.complex128]:
    """Pressure over displacement at the top of a layer when all above is like it, with density changing as below."""
    if j == 0:
        return admittance
    middle = 0.5 * (column.edge[..., 1:] + column.edge[..., :-1])
    change = np.log(column.density[..., j] / column.density[..., j - 1]) / (middle[..., j] - middle[..., j - 1])
    half = 0.5 * change[..., None]
    stiffness = (column.density[..., j] * column.wind[..., j] ** 2)[..., None] * slowing[..., 0, :]
    m = admittance / (1j * stiffness)
    open_end = admittance * np.sqrt(1.0 - (half / m) ** 2) - half * stiffness
    return np.asarray(
        open_end * np.exp(half * (column.edge[..., j + 1, None] - column.edge[..., j, None])), np.complex128
    )


def _without_expansion(column: Layers) -> tuple[Layers, NDArray[np.float64]]:
    """Column in which displacement is counted without the expansion of rising air, and that expansion in each layer."""
    steps = column.compression * np.diff(column.edge, axis=-1)
    middle = np.cumsum(steps, axis=-1) - 0.5 * steps
    return replace(column, density=column.density * np.exp(2.0 * middle)), np.exp(steps)


def _blocks(count: int, width: int) -> list[slice]:
    """Layers in blocks from the top down, small enough for their arrays to stay in the processor's cache."""
    size = max(1, 8192 // max(width, 1))
    stops = range(count, 0, -size)
    return [slice(max(stop - size, 0), stop) for stop in stops]


def _layer_parts(
    column: Layers, block: slice, k: NDArray[np.inexact], slowing: NDArray[np.complex128], hydrostatic: bool
) -> tuple[NDArray[np.complex128], ...]:
    """What the recursion needs: with E = exp(2imd) and A = i rho U^2 m, 2 exp(imd), 1 + E, (1 - E)/A, (1 - E) A, A."""
    depth = np.diff(column.edge, axis=-1)[..., block, None]
    wind_squared = column.wind[..., block, None] ** 2
    ratio = column.n_squared[..., block, None] / wind_squared
    if np.iscomplexobj(k):
        m = np.sqrt(np.asarray(ratio / slowing - (0.0 if hydrostatic else k**2), np.complex128))
        real, imag = m.real, m.imag
    else:
        fast = 1.0 / slowing
        real, imag = _upward_root(ratio * fast.real - (0.0 if hydrostatic else k.real**2), ratio * fast.imag)
    # neither wave nor fading: the limit is taken through a very long wave
    real = np.where(np.abs(real) + np.abs(imag) < 1e-6 / depth, 1e-6 / depth, real)
    step = _wave_factor(real, imag, depth)
    twice = step * step
    m = np.empty(step.shape, np.complex128)
    m.real, m.imag = -imag, real  # times i
    admittance = np.asarray(m * ((column.density[..., block, None] * wind_squared) * slowing), np.complex128)
    minus = 1.0 - twice
    return 2.0 * step, 1.0 + twice, minus / admittance, minus * admittance, admittance


def _wave_factor(
    real: NDArray[np.float64], imag: NDArray[np.float64], depth: NDArray[np.float64]
) -> NDArray[np.complex128]:
    """``exp(i m depth)``; sine and cosine from the tangent of half the angle, which numpy works out far faster."""
    half = np.tan(0.5 * depth * real)
    square = half * half
    size = np.exp(-depth * imag) / (1.0 + square)
    factor = np.empty(half.shape, np.complex128)
    np.multiply(size, 1.0 - square, out=factor.real)
    np.multiply(size, half + half, out=factor.imag)
    return factor


def _upward_root(
    real: NDArray[np.float64], imag: NDArray[np.float64]
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Root with no negative part: it fades or carries energy upward. Faster than the complex root."""
    side = np.abs(imag)
    large = np.sqrt(0.5 * (np.sqrt(real * real + imag * imag) + np.abs(real)))
    small = side / np.maximum(2.0 * large, 1e-30)
    forward = real >= 0.0
    return np.where(forward, large, small), np.where(forward, small, large)


def _edge_jump(column: Layers) -> NDArray[np.float64]:
    """Density times reduced gravity at the edges [Pa m-1]."""
    inner = 0.5 * (column.density[..., 1:] + column.density[..., :-1])
    density = np.concatenate([column.density[..., :1], inner, column.density[..., -1:]], axis=-1)
    return np.asarray(density * column.jump)


def _low_scorer(column: Layers) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Depth and N / U of the layers in the lowest 5 km, where trapped waves live; 0 above."""
    depth = np.diff(column.edge, axis=-1)
    low = np.cumsum(depth, axis=-1) - depth < 5000.0
    return np.where(low, depth, 0.0), np.where(low, np.sqrt(column.n_squared) / column.wind, 0.0)


def _shortest(column: Layers) -> NDArray[np.float64]:
    """Shortest wave to work out layer by layer, (..., 1): each member has its own."""
    largest = np.max(_low_scorer(column)[1], axis=-1, keepdims=True)
    return np.asarray(np.clip(2.0 * np.pi / np.maximum(_FADING * largest, 1e-9), *SHORTEST_WAVE))


def _friction(column: Layers, wavenumber: NDArray[np.float64], length: float) -> NDArray[np.float64]:
    """Damping over kU, for waves short enough to be trapped."""
    depth, scorer = _low_scorer(column)
    scorer = np.sum(depth * scorer, axis=-1) / np.sum(depth, axis=-1)
    limit = np.maximum(_FRICTION_SHARE * scorer, 1e-5)[..., None, None]
    sharp = (wavenumber / limit) ** 4
    return np.asarray(sharp / (1.0 + sharp) / (wavenumber * length))
