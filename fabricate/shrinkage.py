"""Two conventions by which a mould is made larger for what the part shrinks, and how far they are apart.

A shrinkage ``S`` that is referred to the mould, as ISO 294-4 has it (from memory), makes the mould ``part/(1 − S)``:
this is what the mould is made by. One that is referred to the part makes it ``part (1 + S)``. A figure taken from a
book or a supplier seldom says which it is. Lengths are millimetres.
"""

from __future__ import annotations

from dataclasses import dataclass

from fabricate.chain import Chain


@dataclass(frozen=True)
class ShrinkageConventions:
    """The mould's rim diameter by either convention.

    Parameters
    ----------
    percent : float
        The shrinkage that the job states [%].
    by_mould : float
        Rim diameter of a mould that is ``part/(1 − S)``, as the job's is [mm].
    by_part : float
        Rim diameter of a mould that would be ``part (1 + S)`` [mm].
    """

    percent: float
    by_mould: float
    by_part: float

    @property
    def difference(self) -> float:
        """How much larger the mould is than by the other convention, on the rim's diameter [mm]."""
        return self.by_mould - self.by_part


def size_by_mould(part: float, percent: float) -> float:
    """Return a size of the mould where shrinkage is referred to the mould, ``part/(1 − S)``.

    Parameters
    ----------
    part : float
        Size of the cold part [mm].
    percent : float
        Shrinkage S [%].

    Returns
    -------
    float
        Size of the cold mould [mm].

    Examples
    --------
    >>> round(size_by_mould(300.0, 0.6), 7)
    301.8108652
    """
    return part / (1.0 - 0.01 * percent)


def size_by_part(part: float, percent: float) -> float:
    """Return a size of the mould where shrinkage is referred to the part, ``part (1 + S)``.

    Parameters
    ----------
    part : float
        Size of the cold part [mm].
    percent : float
        Shrinkage S [%].

    Returns
    -------
    float
        Size of the cold mould [mm].

    Examples
    --------
    >>> round(size_by_part(300.0, 0.6), 7)
    301.8
    """
    return part * (1.0 + 0.01 * percent)


def shrinkage_conventions(chain: Chain) -> ShrinkageConventions:
    """Return the mould's rim diameter by either convention.

    Parameters
    ----------
    chain : Chain
        The maps between part and mould [mm].

    Returns
    -------
    ShrinkageConventions
        In millimetres. A mould that grows on heating is smaller by the same factor in both.
    """
    percent = chain.job.forming.shrinkage.percent
    used = 2.0 * chain.point_on_mould(chain.released.rim)[0]
    part = used / size_by_mould(1.0, percent)
    return ShrinkageConventions(percent, used, size_by_part(part, percent))
