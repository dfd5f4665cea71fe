"""The edge of orolift: the only layer that opens files.

Everything here turns what people have (case files, rasters, soundings) into
the SI arrays the physics takes, and writes results so that a file is either
whole or not there.
"""
