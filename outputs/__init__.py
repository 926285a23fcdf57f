"""Formats: each module writes one and reads it back."""

__all__ = [
    "choice",
    "dxf",
    "dxf_drawing",
    "dxf_pieces",
    "dxf_reader",
    "gcode",
    "gcode_reader",
    "gcode_words",
    "package",
    "plain_text",
    "readings",
    "stl",
    "svg",
    "svg_items",
    "table",
    "text_file",
]
