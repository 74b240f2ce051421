"""Which columns are read, which travel along, and which must be named better."""

from __future__ import annotations

import pytest

from app.cell_columns import KNOWN, REQUIRED, check_header, meant_by
from app.files.table_error import TableError
from app.session.fields import FIELDS

MEANT = [
    ("Voc", "voc_V"), ("VOC_V", "voc_V"), ("V_oc (V)", "voc_V"), ("Voc [mV]", "voc_V"), ("voc_mV", "voc_V"),
    ("Open-circuit voltage (V)", "voc_V"),
    ("jsc", "jsc_mA_cm2"), ("Jsc (mA/cm²)", "jsc_mA_cm2"), ("jsc_A_m2", "jsc_mA_cm2"), ("Jsc_mAcm-2", "jsc_mA_cm2"),
    ("FF", "ff_pct"), ("FF (%)", "ff_pct"), ("fill factor", "ff_pct"), ("ff_fraction", "ff_pct"),
    ("Eg", "gap_eV"), ("band gap (eV)", "gap_eV"), ("Eg_meV", "gap_eV"), ("gap", "gap_eV"),
    ("T", "temperature_C"), ("T_K", "temperature_C"), ("temp (°C)", "temperature_C"),
    ("temperature_K", "temperature_C"), ("P_W_m2", "irradiance_mW_cm2"), ("irradiance (W/m²)", "irradiance_mW_cm2"),
    ("suns", "irradiance_mW_cm2"), ("ERE", "ere"), ("ERE_%", "ere"), ("ere_ppm", "ere"),
    ("n", "ideality"), ("ideality factor", "ideality"), ("Rs", "rs_ohm_cm2"), ("rs_ohm", "rs_ohm_cm2"),
    ("Rs (Ω cm²)", "rs_ohm_cm2"), ("series resistance", "rs_ohm_cm2"), ("Rsh_kohm_cm2", "rsh_ohm_cm2"),
    ("pFF", "pseudo_ff_pct"), ("pseudo_ff", "pseudo_ff_pct"), ("Area (mm²)", "area_cm2"), ("A_cm2", "area_cm2"),
    ("Name", "name"), ("GROUP", "group"), ("Spectrum", "spectrum"), ("JV file", "jv_file"), ("U_voc_V", "u_voc_V"),
]  # fmt: skip

FREE = [
    "note", "story", "date", "operator", "pce_pct", "PCE (%)", "efficiency", "voc_rev", "Voc comment", "jsc_eqe_mA_cm2",
    "voc_limit_V", "Isc (mA)", "sample", "t", "p", "a", "N", "T80 (h)", "n_pixels", "area_note", "spectrum_file",
    "group leader", "reference cell", "jv_files", "file", "日本", "Δ", "%",
]  # fmt: skip


@pytest.mark.parametrize(("column", "known"), MEANT)
def test_other_spellings_and_units_are_seen_through(column: str, known: str) -> None:
    assert meant_by(column) == known
    with pytest.raises(TableError, match=rf"looks like {known}: name it {known}"):
        check_header((*REQUIRED, column), "cells.csv")


@pytest.mark.parametrize("column", FREE)
def test_names_of_the_user_are_free(column: str) -> None:
    assert meant_by(column) == ""
    assert check_header((*REQUIRED, column), "cells.csv") == (column,)


def test_known_columns_are_read_and_do_not_travel_along() -> None:
    uncertainties = tuple(f"u_{field.column}" for field in FIELDS)
    assert check_header((*sorted(KNOWN), *uncertainties, "note"), "cells.csv") == ("note",)
