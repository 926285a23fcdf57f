"""The two conventions of shrinkage on 300 mm.

Both conventions were seen in help texts; that ISO 294-4 refers S to the mould is from memory. Numbers are computed from
the two formulas and printed with nine digits or more, so they are met to half of the last one.
"""

from __future__ import annotations

import pytest

from fabricate.shrinkage import size_by_mould, size_by_part


def test_on_300_mm() -> None:
    assert size_by_part(300.0, 0.6) == pytest.approx(301.8, abs=1e-12)
    assert size_by_mould(300.0, 0.6) == pytest.approx(301.8108652, abs=5e-8)
    assert size_by_mould(300.0, 0.6) - size_by_part(300.0, 0.6) == pytest.approx(0.01086519, abs=5e-9)
    assert size_by_mould(300.0, 2.0) - size_by_part(300.0, 2.0) == pytest.approx(0.1224490, abs=5e-8)


def test_focal_length_grows_like_the_diameter() -> None:
    # Derived: f = 100, S = 0.6 %.
    assert size_by_mould(100.0, 0.6) == pytest.approx(100.6036217, abs=5e-8)
