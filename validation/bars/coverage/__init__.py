"""Mesh errors of chosen cases on three meshes."""
