"""Hydrostatic flow of finite amplitude over a ridge: Long's equation, uniform wind and stability upwind."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.checks import within

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_ROUNDS = 400
_CONVERGED = 1e-7


@dataclass(frozen=True)
class FiniteAmplitude:
    """Wind along the ground by Long's equation.

    Attributes
    ----------
    speed_factor : ndarray, shape (nx,) [1]
        Wind along the ground over the wind upwind.
    steepness : float [1]
        Largest ``d(eta)/dz`` aloft. From 1 on the wave overturns and the solution no longer holds.
    settled : bool
        Whether the iteration settled; if not, the numbers mean nothing.
    """

    speed_factor: NDArray[np.float64]
    steepness: float
    settled: bool


def finite_amplitude_wind(
    ground: ArrayLike, spacing: float, n: float, wind: float, *, padding: float = 1.0e6
) -> FiniteAmplitude:
    """Wind along the ground by Long's equation, hydrostatic, with waves leaving upward.

    Use it for one effective layer when the linear solution is too weak: linear theory at
    fixed points underestimates the wind in the lee by up to a fifth.

    Parameters
    ----------
    ground : array_like, shape (nx,) [m]
        Height above the level upwind, near 0 at both ends.
    spacing : float [m]
        1 m to 100 km.
    n : float [s-1]
        Buoyancy frequency, 0 to 0.1.
    wind : float [m s-1]
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
    >>> flow.speed_factor.max().round(2), flow.settled
    (np.float64(1.34), True)
    """
    height = within("ground", ground, -9000.0, 9000.0, "m", "Give metres above the level upwind.")
    step = float(within("spacing", spacing, 1.0, 1e5, "m", "Give metres."))
    scorer = float(within("n", n, 0.0, 0.1, "s-1")) / float(within("wind", wind, 0.1, 200.0, "m s-1"))
    count = height.size
    length = count + int(np.ceil(padding / step))
    phase = scorer * np.pad(height, (0, length - count))
    cosine, sine = np.cos(phase), np.sin(phase)
    if np.min(cosine) < 0.1:  # ground higher than about a quarter wavelength: far beyond overturning
        return FiniteAmplitude(np.ones(count), np.inf, settled=False)
    f = phase.copy()
    g = _hilbert(f)
    settled = False
    for _ in range(_ROUNDS):
        change = 0.3 * ((phase + g * sine) / cosine - f)
        f = f + change
        g = _hilbert(f)
        largest = float(np.max(np.abs(change)))
        settled = largest < _CONVERGED
        if settled or not largest < 10.0:
            break
    steepness = float(np.max(np.hypot(f, g)))
    speed = 1.0 + f * sine + g * cosine
    return FiniteAmplitude(np.asarray(speed[:count]), steepness, settled)


def _hilbert(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Hilbert transform, of 1 / (1 + x^2) it is x / (1 + x^2)."""
    spectrum = np.fft.rfft(values) * -1j
    spectrum[0] = 0.0
    return np.asarray(np.fft.irfft(spectrum, n=values.size))
