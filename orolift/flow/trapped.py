"""Waves that a column traps in the lee: their length and how far they reach."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.errors import OutOfRangeError
from orolift.flow.waves import response

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.flow.layers import Layers

LONGEST_WAVE = 60e3
"""Longest wave [m] that is looked for: rotation bends longer ones; a judgement."""
SHORTEST_WAVE = 2e3
"""Shortest wave [m] that is looked for: none shorter than ``2 pi U / N`` of the slowest layers; a judgement."""
_SAMPLES = 300
_ROUNDING = 1e-9  # leak over wavenumber that the secant rule cannot tell from none


@dataclass(frozen=True)
class TrappedWaves:
    """Waves the column can hold without a source, longest first.

    Attributes
    ----------
    wavelength : ndarray, shape (n,) [m]
    decay_distance : ndarray, shape (n,) [m]
        In which they fade by a factor e because they leak upward; infinite when fully trapped. Friction not counted.
    """

    wavelength: NDArray[np.float64]
    decay_distance: NDArray[np.float64]


def trapped_waves(column: Layers) -> TrappedWaves:
    """Waves that a column traps in the lee.

    Parameters
    ----------
    column : Layers
        Without leading axes.

    Returns
    -------
    TrappedWaves
        Empty when there are none. Leaking waves are counted when they fade over
        more than their own length.

    Raises
    ------
    OutOfRangeError
        If the column has leading axes.

    Notes
    -----
    Resonance: wavenumbers at which displacement may vanish at the ground
    while it does not aloft, that is, pressure over displacement has a pole. Fully trapped
    where waves fade in the uppermost layer; there pressure over displacement is real
    and falls with wavenumber between poles, so that each upward jump is one. Where
    they spread upward in it (a stratosphere, usually) the pole is followed to a complex
    wavenumber, its imaginary part being the decay. For two layers of depth H below and
    without end above, this is the rule of Scorer (1949) [1]_,
    ``l1^2 - l2^2 > pi^2 / (4 H^2)``.

    References
    ----------
    .. [1] R. S. Scorer (1949), "Theory of waves in the lee of mountains",
       Q. J. R. Meteorol. Soc. 75, 41-56.

    Examples
    --------
    >>> from orolift.flow.layers import layers
    >>> column = layers([0.0, 3000.0, 6000.0], 1.0, 10.0, [1e-4, 1.6e-5])
    >>> trapped_waves(column).wavelength.round()
    array([9285.])
    """
    if column.density.ndim != 1:
        raise OutOfRangeError(
            f"column: {column.density.ndim - 1} leading axes, but trapped waves are looked for in one column. "
            "Take the members one by one."
        )
    last = int(column.carrying) - 1
    spreading = np.sqrt(column.n_squared[last]) / column.wind[last]
    k = 2.0 * np.pi / np.geomspace(LONGEST_WAVE, SHORTEST_WAVE, _SAMPLES)
    k = np.sort(np.append(k, spreading * (1.0 + np.geomspace(1e-8, 1e-1, 60))))  # waves just trapped lie close to it
    k = k[(k >= 2.0 * np.pi / LONGEST_WAVE) & (k <= 2.0 * np.pi / SHORTEST_WAVE)]
    impedance = response(column, k).impedance[0]
    fades = k > spreading
    held = [(one, np.inf) for one in _fully_trapped(column, k[fades], impedance[fades].real)]
    leaking = _leaking(column, k[~fades], np.abs(impedance[~fades]))
    found = sorted(held + leaking)
    return TrappedWaves(
        wavelength=np.array([2.0 * np.pi / one for one, _ in found]),
        decay_distance=np.array([decay for _, decay in found]),
    )


def _fully_trapped(column: Layers, k: NDArray[np.float64], impedance: NDArray[np.float64]) -> list[float]:
    """Wavenumbers of the upward jumps of a real impedance, narrowed down to a ten-millionth."""
    jumps = np.flatnonzero((impedance[:-1] < 0.0) & (impedance[1:] > 0.0))
    found = []
    for jump in jumps:
        low, high = float(k[jump]), float(k[jump + 1])
        for _ in range(3):
            inner = np.linspace(low, high, 200)
            values = response(column, inner).impedance[0].real
            rises = np.flatnonzero((values[:-1] < 0.0) & (values[1:] > 0.0))
            if rises.size == 0:
                break
            low, high = float(inner[rises[0]]), float(inner[rises[0] + 1])
        found.append(0.5 * (low + high))
    return found


def _leaking(column: Layers, k: NDArray[np.float64], size: NDArray[np.float64]) -> list[tuple[float, float]]:
    """Wavenumber and decay distance of the complex poles above which the impedance peaks."""
    if k.size < 3:
        return []
    peaks = np.flatnonzero((size[1:-1] > size[:-2]) & (size[1:-1] > size[2:])) + 1
    found: list[tuple[float, float]] = []
    for peak in peaks:
        pole = _pole(column, complex(k[peak], 0.01 * k[peak]))
        if pole is None or abs(pole.real / k[peak] - 1.0) > 0.1:
            continue
        leak = pole.imag / pole.real
        new = all(abs(pole.real / other - 1.0) > 1e-3 for other, _ in found)
        if new and -_ROUNDING < leak < 1.0 / (2.0 * np.pi):
            found.append((pole.real, 1.0 / pole.imag if leak > _ROUNDING else np.inf))
    return found


def _pole(column: Layers, guess: complex) -> complex | None:
    """Complex wavenumber near the guess at which displacement over pressure vanishes, by the secant rule."""

    def ratio(k: complex) -> complex:
        return complex(1.0 / response(column, np.array([k])).impedance[0, 0])

    old, new = guess, guess * (1.0 + 1e-3)
    old_ratio = ratio(old)
    for _ in range(30):
        new_ratio = ratio(new)
        change = new_ratio - old_ratio
        if change == 0.0:
            return None
        step = new_ratio * (new - old) / change
        old, old_ratio = new, new_ratio
        new = new - step
        if abs(new - guess) > 0.5 * abs(guess):
            return None  # the way leads to another pole, or to none
        if abs(step) < 1e-9 * abs(new):
            return new
    return None
