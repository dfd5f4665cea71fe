"""Air over a range: stability, blocking, mountain waves, streamlines, downslope wind. Arrays only, no files."""
