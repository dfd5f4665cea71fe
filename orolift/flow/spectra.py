"""The boundary of a flow taken apart into waves, and put together again at the points that are asked for."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

_PIECE = 2**18  # multiplications in one product of matrices, for which no library starts threads
_TAIL = 1e-6  # share of the energy of the boundary that may be left to the shorter parts


def spectrum_of(
    ground: NDArray[np.float64], step: float, padding: float, shortest: ArrayLike
) -> tuple[NDArray[np.complex128], NDArray[np.float64], NDArray[np.float64], int]:
    """Spectrum of a padded boundary, as far as its waves are worth keeping.

    Parameters
    ----------
    ground : ndarray (..., nx) [m]
    step : float [m]
        Between its points.
    padding : float [m]
        Level ground added.
    shortest : array_like, broadcasts with (..., 1) [m]
        Waves shorter than this are left out.

    Returns
    -------
    spectrum : ndarray (..., nk)
        Each member keeps its own waves, so that it does not depend on the others; beyond them it is zero.
    wavenumber : ndarray (nk,) [rad m-1]
        The first, of the mean, stands for very long waves.
    last : ndarray (..., 1) [rad m-1]
        The last that each member keeps.
    length : int
        Points of the padded boundary.
    """
    length = _fast_length(ground.shape[-1] + int(np.ceil(padding / step)))
    spectrum = np.fft.rfft(ground, n=length, axis=-1)
    wavenumber = np.asarray(2.0 * np.pi * np.fft.rfftfreq(length, step), np.float64)
    energy = np.abs(spectrum) ** 2
    energy = energy / np.maximum(np.sum(energy, axis=-1, keepdims=True), 1e-300)
    tail = np.cumsum(energy[..., ::-1], axis=-1)[..., ::-1]
    worth = (tail > _TAIL) & (wavenumber * np.asarray(shortest) <= 2.0 * np.pi)
    worth[..., :2] = True
    counts = np.sum(worth, axis=-1, keepdims=True)
    most = int(np.max(counts))
    kept = wavenumber[:most].copy()
    kept[0] = 1e-3 * kept[1]
    return np.where(worth, spectrum, 0.0)[..., :most], kept, kept[counts - 1], length


def over_transect(spectral: NDArray[np.complex128], length: int, points: int | NDArray[np.intp]) -> NDArray[np.float64]:
    """Values of spectra at points of the transect.

    Parameters
    ----------
    spectral : ndarray (..., nk)
    length : int
        Points of the padded transect.
    points : int or ndarray (n,)
        Numbers of the points, or the first so many.

    Returns
    -------
    ndarray (..., n)

    Notes
    -----
    A few levels at a time, so that the padded arrays stay in the cache. At a few points a few waves are summed up
    one by one, which is quicker.
    """
    rows = spectral.reshape(-1, spectral.shape[-1])
    wanted: slice | NDArray[np.intp] = slice(points) if isinstance(points, int) else points
    count = points if isinstance(points, int) else points.size
    if not isinstance(points, int) and 8 * rows.shape[-1] * count <= _PIECE:
        return _at_points(spectral, _cosines(rows.shape[-1], length, points))
    values = np.empty((rows.shape[0], count))
    for start in range(0, rows.shape[0], 16):
        some = rows[start : start + 16]
        full = np.zeros((some.shape[0], length // 2 + 1), np.complex128)
        full[:, : rows.shape[1]] = some
        full[:, 0] = some[:, 0].real  # the mean: the limit of very long waves of either sign
        values[start : start + 16] = np.fft.irfft(full, n=length, axis=-1)[:, wanted]
    return values.reshape(*spectral.shape[:-1], count)


def _at_points(spectral: NDArray[np.complex128], cosines: NDArray[np.float64]) -> NDArray[np.float64]:
    """Product with the cosines, in small pieces: threads would wait more than they work."""
    rows = spectral.reshape(-1, spectral.shape[-1]).view(np.float64)
    values = np.empty((rows.shape[0], cosines.shape[-1]))
    size = _PIECE // cosines.size
    for start in range(0, rows.shape[0], size):
        np.matmul(rows[start : start + size], cosines, out=values[start : start + size])
    return values.reshape(*spectral.shape[:-1], -1)


def _cosines(waves: int, length: int, points: NDArray[np.intp]) -> NDArray[np.float64]:
    """What each real and imaginary part of a spectrum adds at points, (2 nk, n)."""
    phase = (2.0 * np.pi / length) * (np.outer(np.arange(waves), points) % length)
    parts = np.stack([np.cos(phase), -np.sin(phase)], axis=1) * (2.0 / length)
    parts[0] = [[1.0 / length], [0.0]]  # the mean: the limit of very long waves of either sign
    if 2 * (waves - 1) == length:
        parts[-1] *= 0.5  # the shortest wave stands for both signs
    return np.asarray(parts.reshape(2 * waves, -1))


def _fast_length(least: int) -> int:
    """Smallest even number of at least `least` with no prime factor above 5, for a fast transform."""
    length = least + least % 2
    while True:
        rest = length
        for prime in (2, 3, 5):
            while rest % prime == 0:
                rest //= prime
        if rest == 1:
            return length
        length += 2
