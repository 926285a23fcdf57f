from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from fabricate.chain import Chain
from fabricate.job import Job, parse_job
from fabricate.springback import LAWS as SPRINGBACK_LAWS
from profiles.errors import DishwrightError, GeometryError, JobError

SHAPES = [(reflecting, contact) for reflecting in ("concave", "convex") for contact in ("concave", "convex")]


def _job(
    *,
    springback: str = 'law = "none"',
    thinning: str = 'law = "none"',
    faces: tuple[str, str] = ("concave", "concave"),
    process: str = "spinning",
    reflector: str = "focal_length = 110.0\nrim_diameter = 400.0",
    more: str = "",
) -> Job:
    return parse_job(
        f"""
title = "A dish"
units = "mm"
[reflector]
{reflector}
reflecting_face = "{faces[0]}"
[sheet]
material = "aluminium 1085-O"
thickness = 1.5
coating_thickness = 0.02
[forming]
process = "{process}"
contact_face = "{faces[1]}"
[forming.springback]
{springback}
[forming.thinning]
{thinning}
{more}
[tolerance.files]
chord_error = 0.01
""",
        name="test.toml",
    )


def _round_trip_error(chain: Chain) -> float:
    wanted = chain.released.meridian
    part = chain.to_part(chain.to_mould(wanted))
    where = np.linspace(0.0, min(part.end, wanted.end), 301)
    return max(float(np.abs(part.points(where) - wanted.points(where)).max()), abs(part.end - wanted.end))


SPRINGBACKS = [
    'law = "bending"\nflow_stress_mpa = 9.0',
    'law = "none"',
    'law = "focal-length"\npercent = 4.0',
    'law = "focal-length"\ndepth_loss = 2.0',
    'law = "curvature"\npercent = 3.0',
    'law = "curvature"\nrim_slope_loss_deg = 0.7',
    'law = "stations"\nstations = [[0.0, 1.0], [120.0, 2.0], [200.0, 0.5]]',
]
THINNINGS = [
    'law = "none"',
    'law = "sine-law"',
    'law = "straight-vacuum"',
    'law = "stations"\nstations = [[0.0, 1.5], [80.0, 1.45], [160.0, 1.3], [200.0, 1.1]]',
]


@pytest.mark.parametrize("faces", SHAPES, ids="-".join)
@pytest.mark.parametrize("thinning", THINNINGS)
@pytest.mark.parametrize("springback", SPRINGBACKS[::3])
def test_part_to_mould_and_back(springback: str, thinning: str, faces: tuple[str, str]) -> None:
    chain = Chain(_job(springback=springback, thinning=thinning, faces=faces))
    assert _round_trip_error(chain) < 1e-9


@pytest.mark.parametrize("ratio", [0.2, 0.25, 0.3, 0.4, 0.6, 1.0, 1.5])
@pytest.mark.parametrize("thinning", THINNINGS)
@pytest.mark.parametrize("springback", [law for law in SPRINGBACKS if "bending" not in law][1:])
def test_part_to_mould_and_back_over_f_over_d(springback: str, thinning: str, ratio: float) -> None:
    job = _job(
        springback=springback,
        thinning=thinning,
        faces=("concave", "convex"),
        reflector=f"focal_length = {400.0 * ratio}\nrim_diameter = 400.0",
        more="[forming.shrinkage]\npercent = 0.6\n[mould]\ncover_thickness = 0.4",
    )
    assert _round_trip_error(Chain(job)) < 1e-9


@settings(max_examples=40)
@given(st.from_type(Job))
def test_any_job_makes_the_round_trip_or_is_refused(job: Job) -> None:
    chain = Chain(job.in_millimetres())
    try:
        mould = chain.mould
    except DishwrightError:
        return
    # How far the way back can be followed where the thickness follows the slope is shown above, on real proportions.
    if job.forming.thinning.law == "none":
        assert _round_trip_error(chain) < 1e-9 * max(1.0, 1e-3 * mould.curve.end)


def test_the_contact_face_that_is_the_mirror_lies_on_the_mould_itself() -> None:
    chain = Chain(_job())
    # Only the coating comes off: the sheet lies behind the mirror.
    foot = chain.forming_surface.nearest(chain.released.meridian.points(np.array([0.0, 150.0])) + np.array([0.0, 0.02]))
    assert chain.vertex_gap == pytest.approx(0.02, abs=1e-12)
    assert foot[0] == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize(
    ("faces", "distance"),
    [
        # Towards the focus positive: coating 0.02, sheet 1.5 and cover 0.5, from the mirror to the mould.
        (("concave", "concave"), -0.02 + 0.5),
        (("concave", "convex"), -0.02 - 1.5 - 0.5),
        (("convex", "concave"), 0.02 + 1.5 + 0.5),
        (("convex", "convex"), 0.02 - 0.5),
    ],
)
def test_which_way_sheet_coating_and_cover_go(faces: tuple[str, str], distance: float) -> None:
    chain = Chain(_job(faces=faces, more="[mould]\ncover_thickness = 0.5"))
    assert_allclose(chain.shift(np.array([0.0, 100.0, 200.0])), distance, atol=1e-12)
    wanted = chain.released.meridian.offset(distance)
    where = np.linspace(0.0, wanted.end, 50)
    shifted = wanted.points(where) - [0.0, float(wanted.height(0.0))]
    assert_allclose(chain.forming_surface.points(where), shifted, atol=1e-9)


def test_shrinkage_enlarges_the_mould() -> None:
    cold = Chain(_job(more="[forming.shrinkage]\npercent = 0.6"))
    assert cold.enlargement == pytest.approx(1.0 / 0.994, rel=1e-15)
    hot = Chain(
        _job(
            more='[forming.shrinkage]\npercent = 0.6\nreference = "hot-mould"\nmould_expansion = 2e-5\n'
            "temperature_rise = 60.0"
        )
    )
    assert hot.enlargement == pytest.approx(1.0 / 0.994 / (1.0 + 2e-5 * 60.0), rel=1e-15)


def test_the_rim_is_cut_where_its_material_lies() -> None:
    # Practitioners' notes: trimmed at r = 200 on the chuck, a 400 mm part that springs open comes out 1.4 mm too large.
    chain = Chain(_job(springback='law = "focal-length"\npercent = 2.1').model_copy())
    radius, height = chain.point_on_mould(chain.released.rim)
    assert 2.0 * (200.0 - radius) == pytest.approx(1.4, abs=0.06)
    assert height == pytest.approx(float(chain.on_mould.height(chain.released.rim)), abs=0.03)


def test_a_sheet_too_thick_for_the_curve_folds() -> None:
    job = _job(faces=("convex", "concave"), reflector="focal_length = 5.0\nrim_diameter = 12.0", more="").model_copy()
    thick = job.model_copy(update={"sheet": job.sheet.model_copy(update={"thickness": 10.5})})
    with pytest.raises(
        GeometryError,
        match=r"an offset of 10\.52 mm at radius \S+ mm folds the curve: it is not smaller than the radius",
    ):
        _ = Chain(thick).mould


def test_a_mould_that_locks_the_part_is_refused_with_the_radius() -> None:
    chain = Chain(_job(springback='law = "stations"\nstations = [[0.0, 0.0], [100.0, -300.0], [110.0, -300.0]]'))
    with pytest.raises(JobError, match=r"re-entrant: its slope turns at radius \d+\.\d+ mm and is -"):
        _ = chain.mould


def test_every_law_of_the_first_table_is_there() -> None:
    assert {"none", "focal-length", "curvature", "bending", "stations"} == set(SPRINGBACK_LAWS)


@pytest.mark.parametrize("faces", SHAPES, ids="-".join)
@pytest.mark.parametrize(
    "rows", ["[[0.0, 1.5], [200.0, 1.2]]", "[[0.0, 1.2], [200.0, 1.5]]", "[[0.0, 1.5], [80.0, 1.3]]"]
)
def test_a_thickness_table_with_a_slope_at_the_axis_makes_no_point(rows: str, faces: tuple[str, str]) -> None:
    surface = Chain(_job(thinning=f'law = "stations"\nstations = {rows}', faces=faces)).mould.curve
    assert float(surface.slope(surface.start)) == pytest.approx(0.0, abs=1e-9)
    assert surface.slope.smallest()[1] >= -1e-9


def test_rounding_a_thickness_table_off_moves_the_vertex_by_micrometres() -> None:
    chain = Chain(_job(thinning='law = "stations"\nstations = [[0.0, 1.5], [200.0, 1.2]]', faces=("concave", "convex")))
    assert float(chain.thickness(0.0)) == pytest.approx(1.5, abs=2e-3)
    where = float(chain.released.meridian.at_radius(100.0))
    assert float(chain.thickness(where)) == pytest.approx(1.35, abs=1e-12)
