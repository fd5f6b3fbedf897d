"""Structured r-z meshes: smooth maps, nested families, one material per cell."""
