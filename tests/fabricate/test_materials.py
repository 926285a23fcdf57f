from __future__ import annotations

import math

import pytest

from fabricate.materials import (
    QUANTITIES,
    Material,
    SourcedValue,
    material,
    materials_of,
    mould_materials,
    nearest_names,
    sheet_materials,
    source_rows,
    table_rows,
)
from profiles.errors import JobError

SHEETS = [
    *("aluminium 1050-O", "aluminium 1085-O", "aluminium 1100-O", "aluminium 3003-O", "aluminium 5052-O"),
    *("copper C11000-O", "brass C26000-O", "steel DC04", "stainless 304", "stainless 430"),
    *("acrylic cast", "acrylic extruded", "polycarbonate", "PETG", "ABS", "HIPS"),
]
MOULDS = [
    *("tooling board", "MDF laminate", "maple", "grey iron", "aluminium 6061", "steel", "epoxy board"),
    *("PLA print", "PETG print", "PA-CF print"),
]
VALUE = '{ value = 1.0, source = "from memory" }'
ROW = f"""
[[sheet]]
name = "tin"
kind = "metal"
youngs_modulus_mpa = {VALUE}
poisson = {VALUE}
yield_mpa = {VALUE}
density_kg_m3 = {VALUE}
thermal_expansion_per_k = {VALUE}
"""


def test_the_table_has_every_name_of_the_contract() -> None:
    assert [row.name for row in sheet_materials()] == SHEETS
    assert [row.name for row in mould_materials()] == MOULDS


@pytest.mark.parametrize("row", [*sheet_materials(), *mould_materials()], ids=lambda row: row.name)
def test_every_value_is_plausible_and_has_a_source(row: Material) -> None:
    assert 500.0 <= row.youngs_modulus_mpa <= 250e3
    assert 0.2 <= row.poisson <= 0.45
    assert 5.0 <= row.yield_mpa <= 600.0
    assert 400.0 <= row.density_kg_m3 <= 9000.0
    assert row.thermal_expansion_per_k is not None
    assert 3e-6 <= row.thermal_expansion_per_k <= 120e-6
    assert all(entry.source.startswith(("seen", "from memory")) for entry in row.values)


def test_plastics_soften_below_their_forming_temperature_and_metals_do_not_soften() -> None:
    for row in sheet_materials():
        if row.kind == "plastic":
            assert row.softening_temperature_c is not None
            assert row.forming_temperature_c is not None
            assert row.softening_temperature_c < row.forming_temperature_c
        else:
            assert (row.softening_temperature_c, row.forming_temperature_c) == (None, None)


def test_a_rim_speed_limit_is_required_for_all_moulds_but_metal_ones() -> None:
    free = {row.name for row in mould_materials() if not row.rim_speed_limit_required}
    assert free == {"grey iron", "aluminium 6061", "steel"}


def test_a_mistyped_name_is_refused_with_the_nearest() -> None:
    with pytest.raises(JobError, match=r'"aluminum 3003-O", which is no sheet .*; allowed: "aluminium 3003-O"'):
        material("aluminum 3003-O")
    with pytest.raises(JobError, match=r'"mdf", which is no mould .*; allowed: ".*MDF laminate'):
        material("mdf", use="mould")


def test_a_name_far_from_all_lists_all() -> None:
    assert nearest_names("zzzzz", "mould") == tuple(MOULDS)
    assert nearest_names("petg", "sheet")[0] == "PETG"


def test_a_sheet_is_no_mould() -> None:
    with pytest.raises(JobError, match='"steel DC04", which is no mould of the material table; allowed: "steel"'):
        material("steel DC04", use="mould")


def test_table_rows_are_filtered() -> None:
    assert table_rows()[0] == ("use", "name", "kind", *QUANTITIES)
    assert [row[1] for row in table_rows(use="mould", kinds=("print",))[1:]] == [
        "PLA print",
        "PETG print",
        "PA-CF print",
    ]
    assert len(table_rows()) == 1 + len(SHEETS) + len(MOULDS)
    assert all(len(row) == 3 + len(QUANTITIES) for row in table_rows())
    steel = next(row for row in table_rows(use="mould") if row[1] == "steel")
    assert steel[-2:] == ("-", "-")


def test_source_rows_show_the_range_where_sources_differ() -> None:
    rows = source_rows(use="sheet", kinds=("metal",))
    assert ("aluminium 1050-O", "yield_mpa", "26", "MPa", "20 to 55") in [row[:5] for row in rows]
    assert ("aluminium 1050-O", "poisson", "0.33", "", "-") in [row[:5] for row in rows]
    assert {row[0] for row in rows[1:]} == {row.name for row in sheet_materials() if row.kind == "metal"}


def test_a_complete_row_is_read() -> None:
    (row,) = materials_of(ROW)
    assert (row.name, row.use, row.kind, row.yield_mpa) == ("tin", "sheet", "metal", 1.0)


@pytest.mark.parametrize(
    ("old", "new", "says"),
    [
        (f"poisson = {VALUE}\n", "", "tin: poisson is missing"),
        (f"poisson = {VALUE}", f"poissons = {VALUE}", "tin: poissons is no quantity; allowed: youngs_modulus_mpa"),
        ('"metal"', '"print"', 'tin: kind is "print"; allowed: metal, plastic'),
        ("value = 1.0", "value = nan", "youngs_modulus_mpa: nan is not a finite number"),
        ("value = 1.0", "value = 1.0, high = 0.5", "1.0 is outside its range 1.0 to 0.5"),
        ("from memory", "a friend", 'the source is "a friend"; allowed: "seen: …" or "from memory …"'),
        ("[[sheet]]", f"{ROW}[[sheet]]", "tin: the name stands twice among the sheet materials"),
    ],
)
def test_a_faulty_row_is_refused(old: str, new: str, says: str) -> None:
    with pytest.raises(JobError, match=says):
        materials_of(ROW.replace(old, new, 1))


def test_a_value_knows_its_unit() -> None:
    entry = SourcedValue("density_kg_m3", 1.0, 1.0, 1.0, "from memory")
    assert entry.unit == "kg/m³"
    assert math.isfinite(entry.value)
