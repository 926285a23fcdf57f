"""Refusing what is not one of a few allowed values."""

from __future__ import annotations

from profiles.errors import FormatError


def check_one_of(key: str, value: object, allowed: tuple[object, ...]) -> None:
    """Refuse a value that is not one of those allowed.

    Parameters
    ----------
    key : str
        Name of the value, for the message.
    value : object
        What was stated.
    allowed : tuple
        What may be stated.

    Raises
    ------
    FormatError
        If the value is none of them.
    """
    if value not in allowed:
        listed = ", ".join(repr(entry) for entry in allowed)
        raise FormatError(f"{key}: value is {value!r}; allowed: {listed}; do: state one of them")
