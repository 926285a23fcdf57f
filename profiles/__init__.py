"""Exact plane geometry: faces, meridians, offsets, arc paths, deviation, revolved meshes."""
