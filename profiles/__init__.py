"""Exact plane geometry: faces, meridians, offsets, arc paths, deviation, revolved meshes."""

__all__ = [
    "arc_search",
    "arcpath",
    "arcs",
    "best_parabola",
    "chords",
    "deviation",
    "errors",
    "face",
    "facets",
    "meridian",
    "mesh_deviation",
    "mesh_topology",
    "revolve",
    "ring_chain",
    "ring_metric",
    "rings",
    "series",
    "solids",
    "stitching",
    "surfaces",
]
