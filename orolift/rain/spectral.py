"""Linear theory of orographic rain on a periodic grid: from the spectrum of the ground to that of the rain."""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.rain.parameters import RainParameters

    Array = NDArray[np.float64]
    Spectrum = NDArray[np.complex128]

WORKERS = 2
SMALL = 2**21  # cells up to which numpy transforms: loading scipy would cost more than its threads gain
_BLOCK = 16_384  # wavenumbers worked on at a time: the temporaries then stay in the processor's cache
_TINY = 1e-300


def transfer(k: Array, l: Array, parameters: RainParameters) -> Spectrum:  # noqa: E741 (k and l as in the paper)
    """Rain for each metre of ground that varies as exp(i (k x + l y)).

    Parameters
    ----------
    k, l : ndarray, broadcast together [rad m-1]
        Wavenumbers along x (east) and y (north).
    parameters : RainParameters
        The background is not part of it.

    Returns
    -------
    ndarray of complex, broadcast shape [kg m-3 s-1]

    Notes
    -----
    Smith and Barstad (2004) [1]_ (equations from memory, derived again). With s = U k + V l,

    ``P = Cw i s h / [(1 - i m Hw)(1 + i s tc)(1 + i s tf)]``,
    ``m^2 = (N^2 - s^2)(k^2 + l^2) / s^2``,

    m of the sign of s where waves carry energy up (s^2 <= N^2), else positive
    imaginary, decaying upward. Zero where s = 0, its limit. Worked out in real numbers.

    References
    ----------
    .. [1] R. B. Smith and I. Barstad (2004), "A linear theory of orographic
       precipitation", J. Atmos. Sci. 61, 1377-1391.

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> flow = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)
    >>> k = np.array([2 * np.pi / 50e3])
    >>> print((100.0 * abs(transfer(k, np.zeros(1), flow)) * 3600).round(4))  # mm/h for 100 m
    [0.4719]
    """
    p = parameters
    sigma = p.eastward_wind * k + p.northward_wind * l
    square = sigma * sigma
    excess = p.stability**2 - square
    depth = np.sqrt(np.abs(excess) * (k * k + l * l)) * p.vapour_height  # |m| Hw |s|
    size = np.abs(sigma)
    waves = excess >= 0.0
    # times s, over s (s - i depth) or s (|s| + depth)
    part = np.where(waves, square / (square + depth * depth + _TINY), size / (size + depth + _TINY))
    real = np.where(waves, -part * depth, 0.0)
    imaginary = part * sigma
    # the two delays: 1 / (c + i d)
    c = 1.0 - square * (p.cloud_time * p.fall_time)
    d = sigma * (p.cloud_time + p.fall_time)
    scale = p.uplift_sensitivity / (c * c + d * d)
    out = np.empty(scale.shape, dtype=np.complex128)
    out.real = (real * c + imaginary * d) * scale
    out.imag = (imaginary * c - real * d) * scale
    return out


def spectrum_of(ground: Array) -> Spectrum:
    """Half of the spectrum of a ground that repeats itself.

    Parameters
    ----------
    ground : ndarray, shape (ny, nx) [m]
        Rows north to south.

    Returns
    -------
    ndarray of complex, shape (ny, nx // 2 + 1)
        Without the waves of two cells' length, whose sign of travel is undefined.
    """
    ny, nx = ground.shape
    spectrum: Spectrum
    if ground.size <= SMALL:
        spectrum = np.fft.rfft2(ground)
    else:
        from scipy import fft

        spectrum = fft.rfft2(ground, workers=WORKERS)
    if nx % 2 == 0:
        spectrum[:, -1] = 0.0
    if ny % 2 == 0:
        spectrum[ny // 2] = 0.0
    return spectrum


def rain_from_spectrum(
    spectrum: Spectrum,
    shape: tuple[int, int],
    spacing: tuple[float, float],
    parameters: RainParameters,
    *,
    keep: bool = False,
) -> Array:
    """Rain that the ground adds to or takes from the background.

    Parameters
    ----------
    spectrum : ndarray
        From `spectrum_of`; overwritten unless `keep`.
    shape : (int, int)
        Rows and columns of the ground.
    spacing : (float, float) [m]
        Between columns, between rows.
    parameters : RainParameters
    keep : bool

    Returns
    -------
    ndarray, shape (ny, nx) [kg m-2 s-1]
        Negative where descent dries; the mean is zero.
    """
    ny, nx = shape
    k = np.arange(nx // 2 + 1, dtype=np.float64) * (2.0 * np.pi / (nx * spacing[0]))
    rows = np.asarray(2.0 * np.pi * np.fft.fftfreq(ny, -spacing[1]), dtype=np.float64)  # rows run southward
    out = np.empty_like(spectrum) if keep else spectrum
    step = max(1, _BLOCK // k.size)

    def work(first: int) -> None:
        part = slice(first, first + step)
        np.multiply(spectrum[part], transfer(k, rows[part, np.newaxis], parameters), out=out[part])

    with ThreadPoolExecutor(WORKERS) as pool:
        list(pool.map(work, range(0, ny, step)))
    if ny * nx <= SMALL:
        return np.asarray(np.fft.irfft2(out, s=shape), dtype=np.float64)
    from scipy import fft

    rain: Array = fft.irfft2(out, s=shape, workers=WORKERS, overwrite_x=True)
    return rain


def periodic_rain(ground: Array, spacing: tuple[float, float], parameters: RainParameters) -> Array:
    """Rain added by ground that repeats itself beyond its edges, background and truncation left out.

    For real terrain use `rain_map`, which pads it.

    Parameters
    ----------
    ground : ndarray, shape (ny, nx) [m]
        Rows north to south, no gaps.
    spacing : (float, float) [m]
        Between columns, between rows.
    parameters : RainParameters

    Returns
    -------
    ndarray, shape (ny, nx) [kg m-2 s-1]
        Negative where descent dries.

    Examples
    --------
    >>> from orolift.rain.parameters import RainParameters
    >>> flow = RainParameters(15.0, 0.0, 0.005, 2500.0, 0.004)
    >>> wave = 100.0 * np.cos(2.0 * np.pi * np.arange(64) / 64)[np.newaxis]
    >>> print((3600 * periodic_rain(wave, (50e3 / 64, 1.0), flow).max()).round(3))
    0.472
    """
    return rain_from_spectrum(spectrum_of(ground), ground.shape, spacing, parameters)
