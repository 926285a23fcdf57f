"""Blanks: the volume closes under every law, the clamp, masses and what the thickness tolerance does."""

from __future__ import annotations

from functools import cache
from importlib.resources import files
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose
from scipy.interpolate import PchipInterpolator

from fabricate.blank import blank_of, part_volume
from fabricate.chain import Chain
from fabricate.job import parse_job
from profiles.errors import JobError
from profiles.solids import area

PROCESSES = {
    "none": ("spinning", "concave"),
    "sine-law": ("shear-spinning", "concave"),
    "straight-vacuum": ("straight-vacuum", "convex"),
    "stations": ("spinning", "concave"),
}
SPRINGBACKS = [
    'law = "none"',
    'law = "focal-length"\npercent = 3.0',
    'law = "curvature"\npercent = -2.0',
    'law = "stations"\nstations = [[20.0, 1.0], [90.0, 2.5]]',
]
ROWS = [[30.0, 1.5], [60.0, 1.2], [95.0, 1.35]]


@cache
def _chain(
    *,
    thinning: str = "none",
    springback: str = SPRINGBACKS[0],
    reflector: str = "focal_length = 110.0\nrim_diameter = 400.0",
    face: str = "concave",
    forming: str = "",
    sheet: str = "",
    mould: str = "",
    process: tuple[str, str] | None = None,
) -> Chain:
    rows = f"\nstations = {ROWS}" if thinning == "stations" else ""
    word, contact = process or PROCESSES[thinning]
    text = f"""
title = "A dish of Quillet Bay"
units = "mm"
[reflector]
{reflector}
reflecting_face = "{face}"
[sheet]
material = "aluminium 1085-O"
thickness = 1.5
{sheet}
[forming]
process = "{word}"
contact_face = "{contact}"
{forming}
[forming.springback]
{springback}
[forming.thinning]
law = "{thinning}"{rows}
[mould]
{mould}
[tolerance.files]
chord_error = 0.01
"""
    return Chain(parse_job(text, name="test.toml").in_millimetres())


@cache
def _demo(name: str) -> Chain:
    text = files("fabricate").joinpath(f"demo/{name}.toml").read_text(encoding="utf-8")
    return Chain(parse_job(text, name=name).in_millimetres())


def _summed(chain: Chain) -> float:
    """Return ``∫ 2π r t ds`` by Gauss–Legendre between the rows of the tables, thickness from the laws as published."""
    face, released = chain.on_mould, chain.released.meridian
    rows = np.array(ROWS)
    table = PchipInterpolator(rows[:, 0], rows[:, 1])
    thickness = {
        "none": lambda where: np.full_like(where, 1.5),
        "sine-law": lambda where: 1.5 * np.cos(face.slope(where)),
        "stations": lambda where: table(np.clip(released.radius(where), rows[0, 0], rows[-1, 0])),
    }[chain.job.forming.thinning.law]
    corners = released.at_radius(np.array([20.0, 30.0, 60.0, 90.0, 95.0]))
    nodes, weights = np.polynomial.legendre.leggauss(60)
    total = 0.0
    for start, end in pairwise([0.0, *corners.tolist(), face.end]):
        where = 0.5 * (start + end) + 0.5 * (end - start) * nodes
        total += 0.5 * (end - start) * float((weights * face.radius(where) * thickness(where)).sum())
    return 2.0 * np.pi * total


RATIOS = st.floats(0.2, 1.5)
DIAMETERS = st.floats(200.0, 1500.0)


def _random(ratio: float, diameter: float, springback: str, thinning: str) -> Chain:
    reflector = f"focal_length = {ratio * diameter}\nrim_diameter = {diameter}"
    return _chain(thinning=thinning, springback=springback, reflector=reflector)


@given(RATIOS, DIAMETERS, st.sampled_from(SPRINGBACKS), st.sampled_from(["none", "sine-law", "stations"]))
def test_the_volume_is_that_of_the_sheet(ratio: float, diameter: float, springback: str, thinning: str) -> None:
    chain = _random(ratio, diameter, springback, thinning)
    blank = blank_of(chain)
    assert blank.volume == pytest.approx(_summed(chain), rel=1e-9)
    assert 0.25 * np.pi * blank.diameter**2 * 1.5 == pytest.approx(blank.volume, rel=1e-12)


@given(RATIOS, DIAMETERS, st.sampled_from(SPRINGBACKS))
def test_without_thinning_the_blank_has_the_area_of_the_part(ratio: float, diameter: float, springback: str) -> None:
    chain = _random(ratio, diameter, springback, "none")
    blank = blank_of(chain)
    assert blank.rule == "area"
    assert 0.25 * np.pi * blank.diameter**2 == pytest.approx(area(chain.on_mould), rel=1e-9)
    assert blank.developed_difference > 0.0


@given(RATIOS, DIAMETERS, st.sampled_from(SPRINGBACKS))
def test_the_sine_law_keeps_the_diameter(ratio: float, diameter: float, springback: str) -> None:
    chain = _random(ratio, diameter, springback, "sine-law")
    blank = blank_of(chain)
    assert blank.rule == "diameter"
    assert blank.diameter == pytest.approx(2.0 * float(chain.on_mould.radius(chain.on_mould.end)), rel=1e-9)
    assert blank.diameter == pytest.approx(blank.formed_diameter, rel=1e-9)


@given(RATIOS, DIAMETERS, st.sampled_from(SPRINGBACKS))
def test_straight_vacuum_closes_at_the_mouth(ratio: float, diameter: float, springback: str) -> None:
    chain = _random(ratio, diameter, springback, "straight-vacuum")
    mouth = float(chain.on_mould.radius(chain.on_mould.end))
    assert blank_of(chain).volume == pytest.approx(np.pi * mouth**2 * 1.5, rel=1e-9)


def test_the_blank_of_a_paraboloid_has_its_closed_form() -> None:
    focal, rim = 110.0, 200.0
    chain = _chain(forming="trim_allowance = 0.0")
    share = rim / (2.0 * focal)
    closed = 8.0 / 3.0 * np.pi * focal**2 * ((1.0 + share**2) ** 1.5 - 1.0)
    assert blank_of(chain).volume == pytest.approx(1.5 * closed, rel=1e-12)


def test_flange_and_bead_are_flat_rings_of_the_sheet() -> None:
    plain, edged = blank_of(_chain()), blank_of(_chain(forming="flange_width = 20.0\nbead_allowance = 6.0"))
    inner, outer = 0.5 * plain.formed_diameter, 0.5 * plain.formed_diameter + 26.0
    assert edged.volume - plain.volume == pytest.approx(np.pi * (outer**2 - inner**2) * 1.5, rel=1e-9)
    assert edged.developed_length == pytest.approx(plain.developed_length + 52.0, rel=1e-14)
    assert edged.formed_diameter == pytest.approx(plain.formed_diameter + 52.0, rel=1e-14)


@pytest.mark.parametrize("extra", ["flange_width = 20.0\nbead_allowance = 6.0", "bead_allowance = 12.0"])
def test_shear_spinning_keeps_the_diameter_with_flange_and_bead(extra: str) -> None:
    blank = blank_of(_chain(thinning="sine-law", forming=extra))
    assert blank.diameter == pytest.approx(blank.formed_diameter, rel=1e-12)


def test_a_bead_alone_goes_on_along_the_last_tangent() -> None:
    chain = _chain(forming="bead_allowance = 12.0")
    face, plain, blank = chain.on_mould, blank_of(_chain()), blank_of(chain)
    lean = float(np.cos(face.slope(face.end)))
    assert blank.formed_diameter - plain.formed_diameter == pytest.approx(24.0 * lean, rel=1e-12)
    ring = 2.0 * np.pi * 12.0 * (0.5 * plain.formed_diameter + 6.0 * lean)
    assert blank.volume - plain.volume == pytest.approx(1.5 * ring, rel=1e-9)


def test_a_measured_table_goes_on_over_the_flange() -> None:
    # The last row of the table is 1.35 mm.
    plain = blank_of(_chain(thinning="stations"))
    edged = blank_of(_chain(thinning="stations", forming="flange_width = 10.0"))
    inner = 0.5 * plain.formed_diameter
    assert plain.rule == "volume"
    assert edged.volume - plain.volume == pytest.approx(np.pi * ((inner + 10.0) ** 2 - inner**2) * 1.35, rel=1e-9)


@pytest.mark.parametrize("coating", [0.0, 0.3, -0.3])
@pytest.mark.parametrize(("face", "side"), [("concave", 1.0), ("convex", -1.0)])
def test_the_part_is_the_shell_between_its_faces(face: str, side: float, coating: float) -> None:
    # A sphere's shell: volumes of sectors, from the hole's normal to the rim's. The sheet lies behind the coating; a
    # negative coating has been polished away.
    sphere, hole, rim = 200.0, 20.0, 150.0
    chain = _chain(
        reflector="focal_length = 100.0\nconic_constant = 0.0\nrim_diameter = 300.0\nhole_diameter = 40.0",
        face=face,
        sheet=f"coating_thickness = {coating}",
    )
    cosines = np.sqrt(1.0 - (np.array([hole, rim]) / sphere) ** 2)
    near, far = sphere + side * max(coating, 0.0), sphere + side * (1.5 + coating)
    shell = 2.0 * np.pi / 3.0 * abs(far**3 - near**3) * (cosines[0] - cosines[1])
    assert part_volume(chain) == pytest.approx(shell, rel=1e-11)
    assert blank_of(chain).part_mass == pytest.approx(shell * 2700e-9, rel=0.01)


def test_masses_of_the_terrace_heater() -> None:
    blank = blank_of(_demo("terrace-heater"))
    density = _demo("terrace-heater").job.sheet.row.density_kg_m3
    assert blank.blank_mass == pytest.approx(0.25 * np.pi * blank.diameter**2 * 1.0 * density * 1e-9, rel=1e-12)
    assert 0.9 * blank.blank_mass < blank.part_mass < blank.blank_mass


def test_the_bowl_is_thinnest_at_its_vertex() -> None:
    # Practitioners' notes: it thins to 0.85 of its thickness.
    chain = _demo("display-bowl")
    blank = blank_of(chain)
    assert blank.thinnest / 3.0 == pytest.approx(0.85, abs=5e-3)
    assert blank.thinnest_radius == 0.0
    assert blank.rim_thickness == pytest.approx(float(chain.thickness(chain.released.rim)), rel=1e-14)
    # All of the sheet's tolerance reaches the free face, but for what the sheet has thinned.
    assert blank.tolerance_share == pytest.approx(blank.rim_thickness / 3.0, rel=1e-12)
    assert blank.form_error is None


def test_the_shear_spun_dish_is_thinnest_at_its_rim() -> None:
    blank = blank_of(_chain(thinning="sine-law"))
    assert blank.thinnest_radius == pytest.approx(200.0, rel=1e-12)
    assert blank.thinnest == blank.rim_thickness == pytest.approx(1.5 / np.hypot(1.0, 200.0 / 220.0), rel=1e-12)


def test_the_thinnest_place_of_a_table_is_found_between_hole_and_rim() -> None:
    blank = blank_of(_chain(thinning="stations"))
    assert (blank.thinnest, blank.thinnest_radius) == pytest.approx((1.2, 60.0), rel=1e-6)
    outside = blank_of(
        _chain(thinning="stations", reflector="focal_length = 110.0\nrim_diameter = 400.0\nhole_diameter = 140.0")
    )
    assert outside.thinnest_radius == pytest.approx(70.0, rel=1e-9)
    assert outside.thinnest == pytest.approx(float(PchipInterpolator(*np.array(ROWS).T)(70.0)), rel=1e-9)


@pytest.mark.parametrize(
    ("face", "process", "stated", "share", "error"),
    [
        ("concave", ("spinning", "concave"), 0.1, 0.0, 0.0),
        ("concave", ("spinning", "concave"), 0.0, 0.0, 0.0),
        ("convex", ("spinning", "concave"), 0.1, 1.0, 0.1),
        ("convex", ("spinning", "concave"), 0.0, 1.0, None),
        ("concave", ("spinning", "convex"), 0.1, 1.0, 0.1),
    ],
)
def test_the_thickness_tolerance_reaches_the_free_face_only(
    face: str, process: tuple[str, str], stated: float, share: float, error: float | None
) -> None:
    blank = blank_of(_chain(face=face, process=process, sheet=f"thickness_tolerance = {stated}"))
    assert (blank.tolerance_share, blank.form_error) == (share, error)


def test_a_thicker_sheet_moves_the_free_face_by_that_share() -> None:
    # The mould stays and the sheet comes 0.1 mm thicker: the free face comes out by that much further along its normal.
    chain = _demo("display-bowl")
    sheet = chain.job.sheet.model_copy(update={"thickness": 3.1})
    thicker = Chain(chain.job.model_copy(update={"sheet": sheet}))
    wanted, where = chain.released.meridian, np.linspace(0.0, chain.released.rim, 50)
    gained = thicker.thickness(where) - chain.thickness(where)
    part = thicker.to_part(chain.forming_surface).raised(float(gained[0]))
    moved = part.points(part.nearest(wanted.points(where))) - wanted.points(where)
    # To second order in what is gained.
    assert_allclose((moved * wanted.normals(where)).sum(axis=1), gained, atol=2e-5)
    assert gained.max() == pytest.approx(0.1 * blank_of(chain).tolerance_share, rel=1e-9)


@pytest.mark.parametrize("name", ["display-bowl", "listening-dish"])
def test_a_clamped_sheet(name: str) -> None:
    chain = _demo(name)
    blank = blank_of(chain)
    assert blank.rule == "clamp"
    assert blank.clamp_opening == pytest.approx(2.0 * chain.mould.outer_radius, rel=1e-14)
    assert blank.diameter == pytest.approx(2.0 * chain.mould.outer_radius + 40.0, rel=1e-14)
    assert blank.depth_of_draw == chain.mould.land_height
    assert blank.draw_ratio == pytest.approx(chain.mould.land_height / blank.clamp_opening, rel=1e-14)
    mouth = float(chain.on_mould.radius(chain.on_mould.end))
    assert blank.mean_area_ratio == pytest.approx(area(chain.on_mould) / (np.pi * mouth**2), rel=1e-12)


def test_a_spun_sheet_has_no_clamp() -> None:
    blank = blank_of(_chain())
    assert (blank.clamp_opening, blank.mean_area_ratio, blank.depth_of_draw, blank.draw_ratio) == (None,) * 4


@pytest.mark.parametrize(
    ("process", "thinning"),
    [(("straight-vacuum", "convex"), "straight-vacuum"), (("drape-forming", "concave"), "none")],
)
def test_a_clamp_that_is_stated(process: tuple[str, str], thinning: str) -> None:
    shape = "land_width = 30.0"
    mould = _chain(process=process, thinning=thinning, mould=shape).mould
    mouth = 2.0 * (mould.outer_radius - 30.0)
    wide = _chain(
        process=process, thinning=thinning, mould=shape, forming=f"clamp_opening = {mouth + 1.0}\nclamp_grip = 15.0"
    )
    assert blank_of(wide).diameter == pytest.approx(mouth + 31.0, rel=1e-12)
    narrow = _chain(process=process, thinning=thinning, mould=shape, forming=f"clamp_opening = {mouth - 1.0}")
    message = (
        r"forming\.clamp_opening: value is 4\d\d\.\d+ mm; allowed: at least 4\d\d\.\d+ mm, where the mould's edge "
        r"meets its land, or 0 for the mould's own outer diameter; do: make it wider, or state 0"
    )
    with pytest.raises(JobError, match=message):
        blank_of(narrow)


def test_a_mould_without_land_or_edge_is_clamped_at_its_side() -> None:
    bare = _chain(thinning="straight-vacuum", mould="edge_radius = 0.0", forming="clamp_opening = 200.0")
    mouth = 2.0 * float(bare.mould.curve.radius(bare.mould.curve.end))
    with pytest.raises(JobError, match=f"at least {mouth:.6g} mm"):
        blank_of(bare)
