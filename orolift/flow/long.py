"""Hydrostatic flow of finite amplitude over a ridge: Long's equation, uniform wind and stability upwind."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike, NDArray

_ROUNDS = 400
_CONVERGED = 1e-7


@dataclass(frozen=True, eq=False)
class FiniteAmplitude:
    """Wind along the ground by Long's equation.

    Attributes
    ----------
    speed_factor : ndarray, shape (..., nx) [1]
        Wind along the ground over the wind upwind.
    steepness : ndarray, shape (...) [1]
        Largest ``d(eta)/dz`` aloft. From 1 on the wave overturns and the solution no longer holds.
    settled : ndarray of bool, shape (...)
        Whether the iteration settled; if not, the numbers mean nothing.
    """

    speed_factor: NDArray[np.float64]
    steepness: NDArray[np.float64]
    settled: NDArray[np.bool_]


def finite_amplitude_wind(
    ground: ArrayLike, spacing: float, n: ArrayLike, wind: ArrayLike, *, padding: float = 1.0e6
) -> FiniteAmplitude:
    """Wind along the ground by Long's equation, hydrostatic, with waves leaving upward.

    Use it for one effective layer when the linear solution is too weak: linear theory at
    fixed points underestimates the wind in the lee by up to a fifth.

    Parameters
    ----------
    ground : array_like, shape (..., nx) [m]
        Height above the level upwind, near 0 at both ends; leading axes are members.
    spacing : float [m]
        1 m to 100 km.
    n : array_like, shape (...) [s-1]
        Buoyancy frequency, 0 to 0.1.
    wind : array_like, shape (...) [m s-1]
        Across the range, 0.1 to 200.
    padding : float [m]
        Level ground added, so that nothing wraps round.

    Returns
    -------
    FiniteAmplitude

    Raises
    ------
    OutOfRangeError
        If a value is outside its range.

    Notes
    -----
    Long (1953) [1]_ found that displacement obeys a linear equation at any amplitude when N and U are uniform upwind;
    with the boundary where it is, ``eta = f cos(lz) - g sin(lz)``, g the Hilbert transform of f (Lilly and
    Klemp 1979), and f is found from ``f cos(lh) - g sin(lh) = h`` by relaxed iteration. Wind along the ground
    over the wind upwind is ``1 + l (f sin(lh) + g cos(lh))``. Boussinesq; no friction.
    Level ground has no f, so that the transform is asked for over the points of the ground only.

    References
    ----------
    .. [1] R. R. Long (1953), "Some aspects of the flow of stratified fluids. I",
       Tellus 5, 42-58.
    .. [2] D. K. Lilly and J. B. Klemp (1979), "The effects of terrain shape on nonlinear
       hydrostatic mountain waves", J. Fluid Mech. 95, 241-261.

    Examples
    --------
    >>> x = np.arange(-200e3, 200e3, 500.0)
    >>> flow = finite_amplitude_wind(500.0 / (1.0 + (x / 10e3) ** 2), 500.0, 0.01, 10.0)
    >>> flow.speed_factor.max().round(2), bool(flow.settled)
    (np.float64(1.34), True)
    """
    height = within("ground", ground, -9000.0, 9000.0, "m", "Give metres above the level upwind.")
    step = float(within("spacing", spacing, 1.0, 1e5, "m", "Give metres."))
    scorer = within("n", n, 0.0, 0.1, "s-1") / within("wind", wind, 0.1, 200.0, "m s-1")
    lead, count = height.shape[:-1], height.shape[-1]
    phase = (np.broadcast_to(scorer, lead)[..., np.newaxis] * height).reshape(-1, count)
    hilbert = _hilbert(count, count + int(np.ceil(padding / step)))
    speed, steepness = np.ones_like(phase), np.full(phase.shape[0], np.inf)
    settled = np.zeros(phase.shape[0], dtype=bool)
    # ground higher than about a quarter wavelength is far beyond overturning
    rows = np.flatnonzero(np.min(np.cos(phase), axis=-1) >= 0.1)
    f = phase[rows]
    for _ in range(_ROUNDS):
        if not rows.size:
            break
        own, g = phase[rows], hilbert(f)
        sine, cosine = np.sin(own), np.cos(own)
        change = 0.3 * ((own + g * sine) / cosine - f)
        f = f + change
        largest = np.max(np.abs(change), axis=-1)
        done, going = largest < _CONVERGED, (largest >= _CONVERGED) & (largest < 10.0)
        if done.any():
            there = rows[done]
            last = hilbert(f[done])
            settled[there] = True
            steepness[there] = np.max(np.hypot(f[done], last), axis=-1)
            speed[there] = 1.0 + f[done] * sine[done] + last * cosine[done]
        rows, f = rows[going], f[going]
    return FiniteAmplitude(speed.reshape(height.shape), steepness.reshape(lead)[()], settled.reshape(lead)[()])


def _hilbert(count: int, length: int) -> Callable[[NDArray[np.float64]], NDArray[np.float64]]:
    """Hilbert transform of rows (m, count) that are nothing beyond, of 1 / (1 + x^2) it is x / (1 + x^2).

    The values repeat after `length` points; as a convolution it needs no more than twice `count` of them.
    """
    turned = np.full(length // 2 + 1, -1j)
    turned[0] = 0.0
    kernel = np.fft.irfft(turned, n=length)
    size = 1 << (2 * count - 1).bit_length()
    wrapped = np.zeros(size)
    wrapped[:count], wrapped[size - count + 1 :] = kernel[:count], kernel[length - count + 1 :]
    spectrum = np.fft.rfft(wrapped)

    def transform(values: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.asarray(np.fft.irfft(np.fft.rfft(values, n=size) * spectrum, n=size)[:, :count])

    return transform
