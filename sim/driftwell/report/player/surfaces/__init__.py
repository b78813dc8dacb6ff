"""Electrodes, walls and detectors as meshes of a few thousand triangles, to be looked at."""
