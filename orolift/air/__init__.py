"""Moist-air physics and the upwind column: state functions of air parcels, no files, no terrain."""
