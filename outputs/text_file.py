"""Text files read whole: UTF-8, or a refusal that says what is wrong."""

from __future__ import annotations

from pathlib import Path

from profiles.errors import FormatError


def read_text(path: Path) -> str:
    """Return the text of a file, line ends as they are.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    str
        Its text.

    Raises
    ------
    FormatError
        If the file is missing, cannot be read or is not UTF-8.
    """
    try:
        return path.read_bytes().decode("utf-8")
    except FileNotFoundError as error:
        raise FormatError(f"{path}: no such file; allowed: a whole package; do: make the package again") from error
    except (OSError, UnicodeDecodeError) as error:
        raise FormatError(
            f"{path}: cannot be read: {error}; allowed: a text file in UTF-8; do: make the package again"
        ) from error
