"""Terrain as arrays: transects, hand-entered ridges, elevation grids and their features. Opens no file."""

from orolift.terrain.features import Features, features
from orolift.terrain.grid import ElevationGrid, grid_elevation
from orolift.terrain.ridge import ridge_transect
from orolift.terrain.transect import MINIMUM_RELIEF, Transect, transect_elevation

__all__ = [
    "MINIMUM_RELIEF",
    "ElevationGrid",
    "Features",
    "Transect",
    "features",
    "grid_elevation",
    "ridge_transect",
    "transect_elevation",
]
