"""What the proof says of one file."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from profiles.deviation import Deviation


@dataclass(frozen=True)
class FileVerdict:
    """The measured departure of one file from the exact mould curve.

    Parameters
    ----------
    normal_mm : float or None
        Largest distance along the normal [mm]; None where the file could not be measured.
    slope_mrad : float or None
        Largest lean [mrad].
    at_radius_mm : float or None
        Radius at which the distance is reached [mm].
    tolerance_mm : float
        Largest distance allowed [mm].
    findings : tuple of str
        What is wrong, a sentence each; empty where the file has passed.
    """

    normal_mm: float | None
    slope_mrad: float | None
    at_radius_mm: float | None
    tolerance_mm: float
    findings: tuple[str, ...] = ()

    @property
    def passed(self) -> bool:
        """Whether nothing is wrong with the file."""
        return not self.findings

    def as_json(self) -> dict[str, Any]:
        """Return the verdict as plain values, numbers to 12 digits.

        Returns
        -------
        dict
            As in ``proof.json``.
        """
        return {
            "normal_mm": _plain(self.normal_mm),
            "slope_mrad": _plain(self.slope_mrad),
            "at_radius_mm": _plain(self.at_radius_mm),
            "tolerance_mm": self.tolerance_mm,
            "passed": self.passed,
            "findings": list(self.findings),
        }


def measured(found: Deviation, tolerance: float, slope_tolerance: float, others: tuple[str, ...] = ()) -> FileVerdict:
    """Return the verdict on a deviation.

    Parameters
    ----------
    found : Deviation
        What was measured [mm, rad].
    tolerance : float
        Largest distance allowed [mm].
    slope_tolerance : float
        Largest lean allowed [rad]; 0: none is asked for.
    others : tuple of str
        What else is wrong with the file.

    Returns
    -------
    FileVerdict
        With a finding for each tolerance that is not kept.
    """
    findings = []
    if not found.normal <= tolerance:
        findings.append(
            f"strays by {found.normal:.6g} mm at radius {found.at_radius:.6g} mm; allowed: {tolerance:.6g} mm"
        )
    if slope_tolerance > 0.0 and not found.slope <= slope_tolerance:
        findings.append(
            f"leans by {1e3 * found.slope:.6g} mrad at radius {found.slope_at_radius:.6g} mm; "
            f"allowed: {1e3 * slope_tolerance:.6g} mrad"
        )
    return FileVerdict(found.normal, 1e3 * found.slope, found.at_radius, tolerance, (*findings, *others))


def unreadable(tolerance: float, *findings: str) -> FileVerdict:
    """Return the verdict on a file that is missing or cannot be read.

    Parameters
    ----------
    tolerance : float
        Largest distance allowed [mm].
    findings : str
        Why it cannot be measured.

    Returns
    -------
    FileVerdict
        Without figures.
    """
    return FileVerdict(None, None, None, tolerance, findings)


def _plain(value: float | None) -> float | None:
    return None if value is None else float(f"{value:.12g}")
