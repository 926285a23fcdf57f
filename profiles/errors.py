"""Everything the product refuses, in one tree.

::

    DishwrightError
    ├── GeometryError   (ValueError)  profiles:  a curve that cannot be, or cannot be offset or fitted
    ├── FormatError     (ValueError)  outputs:   a file that is missing, unreadable or not in its format
    ├── WriteError      (OSError)     outputs:   a folder that cannot be written, or holds something else
    └── JobError        (ValueError)  fabricate: something a user typed that cannot be made

The command catches ``DishwrightError`` alone and turns it into an exit code. A message says what is
wrong, shows the value with its unit, says what is allowed and what to do.
"""


class DishwrightError(Exception):
    """Base of every error that is raised on purpose."""


class GeometryError(DishwrightError, ValueError):
    """A curve that cannot be, or that cannot be offset, continued or fitted as asked."""


class FormatError(DishwrightError, ValueError):
    """A file that is missing, unreadable or not in the format its name promises."""


class WriteError(DishwrightError, OSError):
    """A folder that cannot be written, or that holds something which must not be overwritten."""


class JobError(DishwrightError, ValueError):
    """Something a user typed that cannot be understood or cannot be made."""
