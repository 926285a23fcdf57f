"""Formats: each module writes one and reads it back."""
