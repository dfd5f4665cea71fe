"""Shaded relief of a map as a PNG picture inside the page: dark shadows, white lights and the sea, all transparent."""

from __future__ import annotations

import base64
import warnings
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.terrain.grid import ElevationGrid

    Array = NDArray[np.float64]

STEEP = 0.8
"""Slope that the steep ground of the map is stretched to, so that low and high ranges are shaded alike."""
MOST_STRETCH = 12.0
SHADOWS, LIGHTS = 12, 8
"""Steps of shadow and of light: few, so that the picture stays small."""
DARKEST, BRIGHTEST = 0.62, 0.42
"""Opacity of the last step."""
SEA = SHADOWS + LIGHTS + 1
SEA_COLOUR = (31, 99, 166, 46)
_FLAT = float(np.sqrt(0.5))  # brightness of level ground under light from 45 degrees


def relief(grid: ElevationGrid, most: int) -> str:
    """Shaded relief as a data address.

    Parameters
    ----------
    grid : ElevationGrid
    most : int
        Picture points along the longer side.

    Returns
    -------
    str
        A PNG picture, its rows north to south. Equal input gives equal text.

    Notes
    -----
    Light from the top left, 45 degrees up, whatever the hour. Cells of means of several where there are more.
    """
    step = max(1, -(-max(grid.elevation.shape) // most))
    ground = block_means(np.nan_to_num(grid.elevation), step)
    dx, dy = step * float(grid.x[1] - grid.x[0]), step * float(grid.y[0] - grid.y[1])
    down, right = np.gradient(ground, dy, dx)
    steep = float(np.percentile(np.hypot(down, right), 98.0))
    stretch = min(STEEP / max(steep, 1e-6), MOST_STRETCH)
    p, q = stretch * right, -stretch * down  # rise toward east and toward north
    bright = (0.5 * p - 0.5 * q + _FLAT) / np.sqrt(1.0 + p * p + q * q) - _FLAT
    shade = np.where(
        bright < 0.0,
        np.ceil(np.clip(-bright / _FLAT, 0.0, 1.0) * SHADOWS - 0.5),
        SHADOWS + np.ceil(np.clip(bright / (1.0 - _FLAT), 0.0, 1.0) * LIGHTS - 0.5),
    )
    shade = np.where((bright >= 0.0) & (shade <= SHADOWS), 0.0, shade)
    return f"data:image/png;base64,{base64.b64encode(_png(np.where(ground <= 0.0, SEA, shade))).decode()}"


def block_means(values: Array, step: int) -> Array:
    """Means of squares of cells; rows and columns left over at the end are left out.

    Examples
    --------
    >>> block_means(np.arange(16.0).reshape(4, 4), 2)
    array([[ 2.5,  4.5],
           [10.5, 12.5]])
    """
    ny, nx = values.shape[0] // step, values.shape[1] // step
    return np.asarray(values[: ny * step, : nx * step].reshape(ny, step, nx, step).mean(axis=(1, 3)))


def _png(shade: Array) -> bytes:
    from rasterio.errors import NotGeoreferencedWarning
    from rasterio.io import MemoryFile

    colours = {0: (0, 0, 0, 0), SEA: SEA_COLOUR}
    for i in range(1, SHADOWS + 1):
        colours[i] = (0, 0, 0, round(255 * DARKEST * i / SHADOWS))
    for i in range(1, LIGHTS + 1):
        colours[SHADOWS + i] = (255, 255, 255, round(255 * BRIGHTEST * i / LIGHTS))
    ny, nx = shade.shape
    with MemoryFile() as memory:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", NotGeoreferencedWarning)  # a picture has no place on Earth
            with memory.open(driver="PNG", width=nx, height=ny, count=1, dtype="uint8", zlevel=9) as out:
                out.write(shade.astype(np.uint8), 1)
                out.write_colormap(1, colours)
        return bytes(memory.read())
