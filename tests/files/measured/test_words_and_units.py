"""What the words above columns mean."""

from __future__ import annotations

import pytest

from app.files.measured.cells import number_in
from app.files.measured.facts import area_of
from app.files.measured.model import DecimalMark
from app.files.measured.read import read_measured
from app.files.measured.units import UNITS, find_unit, name_and_unit
from app.files.measured.words import direction_in, lit_in, word_quantity

SPELLINGS = [
    ("mA/cm²", ["mA/cm2", "mA/cm^2", "mA cm-2", "mA cm^-2", "mA·cm⁻²", "mAcm-2", "mA/cm**2", "ma/cm2", "MA/CM2",
                "mA_cm2", "mA/(cm2)", "mA.cm-2", "mA/cmÂ²", "mA cm⁻²"]),
    ("A/m²", ["A/m2", "A m-2", "A/m^2", "Am-2"]),
    ("µA", ["uA", "µA", "μA", "ua", "ÂµA"]),
    ("V", ["V", "v", "volts", "Volt"]),
    ("mV", ["mV", "MV"]),
    ("nm", ["nm", "NM"]),
    ("µm", ["um", "µm", "micron"]),
    ("eV", ["eV", "ev"]),
    ("%", ["%", "percent"]),
    ("W/m²/nm", ["W/m2/nm", "W m-2 nm-1", "W/(m2 nm)", "W/(m²·nm)", "W_m2_nm", "Wm-2nm-1"]),
]  # fmt: skip


@pytest.mark.parametrize(("unit", "written"), [(unit, one) for unit, many in SPELLINGS for one in many])
def test_spellings_of_units(unit: str, written: str) -> None:
    assert find_unit(written) is UNITS[unit]


@pytest.mark.parametrize("written", ["", "kg", "mAh", "mA/cm3", "a.u.", "V/s", "nm2", "(" * 40, "x" * 1000])
def test_what_is_no_unit_of_the_set(written: str) -> None:
    assert find_unit(written) is None


def test_every_unit_is_found_by_its_name() -> None:
    assert [find_unit(name) for name in UNITS] == list(UNITS.values())


@pytest.mark.parametrize(
    ("cell", "name", "unit"),
    [
        ("Voltage (V)", "Voltage", "V"),
        ("Voltage(V)", "Voltage", "V"),
        ("U [mV]", "U", "mV"),
        ("U{mV}", "U", "mV"),
        ("J / mA cm-2", "J", "mA cm-2"),
        ("J/mA/cm2", "J", "mA/cm2"),
        ("J in mA/cm2", "J", "mA/cm2"),
        ("J, mA/cm2", "J", "mA/cm2"),
        ("J mA/cm2", "J", "mA/cm2"),
        ("J_mA_cm2", "J", "mA_cm2"),
        ("J (mA/cm2) forward", "J forward", "mA/cm2"),
        ("J (forward) (mA/cm2)", "J (forward)", "mA/cm2"),
        ("E [W/(m² nm)]", "E", "W/(m² nm)"),
        ("Current A", "Current", "A"),
        ("Sample A", "Sample A", ""),
        ("Cell 1", "Cell 1", ""),
        ("EQE", "EQE", ""),
        ("EQE %", "EQE", "%"),
        ("J [a.u.]", "J", "a.u."),
        ("J (dark)", "J (dark)", ""),
        ("V", "V", "V"),
        ("", "", ""),
        ("((((((" * 100, ("((((((" * 100)[:200], ""),
    ],
)
def test_names_with_units(cell: str, name: str, unit: str) -> None:
    assert name_and_unit(cell) == (name, unit)


@pytest.mark.parametrize(
    ("name", "quantity"),
    [
        ("Voltage", "voltage"), ("U", "voltage"), ("Bias voltage", "voltage"), ("V_meas", "voltage"),
        ("Spannung", "voltage"),
        ("Current density", "density"), ("J forward", "density"), ("Stromdichte", "density"), ("I", "current"),
        ("Measured current", "current"), ("Jsc", "jsc"), ("J_sc", "jsc"), ("Short-circuit current", "jsc"),
        ("V_oc", "voc"), ("Open circuit voltage", "voc"), ("Leerlaufspannung", "voc"), ("Wavelength", "wavelength"),
        ("λ", "wavelength"), ("Photon energy", "energy"), ("External Quantum Efficiency", "eqe"), ("IPCE", "eqe"),
        ("IQE", "other"), ("V2", "voltage"), ("J12", "density"), ("2", ""),
        ("Efficiency", "other"), ("Reflectance", "reflectance"),
        ("Spectral response", "responsivity"),
        ("Irradiance", "irradiance"), ("Time", "other"), ("Temperature", "other"), ("Mystery", ""), ("", ""),
    ],
)  # fmt: skip
def test_quantities_of_names(name: str, quantity: str) -> None:
    assert word_quantity(name) == quantity


@pytest.mark.parametrize(
    ("text", "direction", "lit"),
    [
        ("Forward scan", "forward", None),
        ("J_rev", "reverse", None),
        ("forward and reverse", "", None),
        ("Dark I-V", "", False),
        ("Illumination: off", "", False),
        ("light, AM1.5G", "", True),
        ("light and dark", "", None),
        ("Rückwärts, beleuchtet", "reverse", True),
        ("highlight of the week", "", None),
    ],
)
def test_words_of_sweeps(text: str, direction: str, lit: bool | None) -> None:
    assert direction_in(text) == direction
    assert lit_in(text) is lit


@pytest.mark.parametrize(
    ("line", "area", "question"),
    [
        ("Area: 0.09 cm2", 0.09, ""),
        ("Area (mm²) = 9", 0.09, ""),
        ("cell_area_cm2: 1,5", 1.5, ""),
        ("Fläche: 0,0009 m²", 9.0, ""),
        ("Aperture area [cm^2]: 0.16", 0.16, ""),
        ("# active area=0.1 cm^2", 0.1, ""),
        ("Area: 0.09", 0.09, "The area “Area: 0.09” has no unit: it is taken as cm²."),
        (
            "Area: 3 mm x 3 mm",
            None,
            "The area “Area: 3 mm x 3 mm” cannot be read: a number with cm², mm² or m² was expected.",
        ),
        (
            "Area: small",
            None,
            "The area “Area: small” cannot be read: a number such as 0.09 cm² was expected.",
        ),
        (
            "Area: 0.1 cm2\nAperture area: 0.2 cm2",
            0.1,
            "There is more than one area, “Area” and “Aperture area”: the first is used.",
        ),
        ("Voltage: 3", None, ""),
    ],
)
def test_areas(line: str, area: float | None, question: str) -> None:
    text = read_measured(f"{line}\nV;J\n0;1\n1;2\n2;3\n".encode(), "x.txt")
    found = area_of(text, text.blocks[0])
    assert (found.cm2, found.question) == (area, question)


@pytest.mark.parametrize(
    ("cell", "decimal", "value"),
    [
        ("1,234", ".", 1234.0), ("1,234", ",", 1.234), ("1.234", ".", 1.234), ("1.234", ",", 1234.0),
        ("0,123", ".", 0.123), ("1,2345", ".", 1.2345), ("1234,567", ".", 1234.567), ("1,234E-1", ".", 0.1234),
        ("1,234,567", ",", 1234567.0), ("1.234,5", ".", 1234.5), ("1,234.5", ",", 1234.5), ("1'234.5", ".", 1234.5),
        ("−1", ".", -1.0), ("1D-3", ".", 1e-3), ("2.5×10⁻³", ".", 2.5e-3), (".5", ".", 0.5), ("5.", ".", 5.0),
    ],
)  # fmt: skip
def test_numbers(cell: str, decimal: DecimalMark, value: float) -> None:
    assert number_in(cell, decimal) == value


@pytest.mark.parametrize(
    "cell", ["1,", "1_000", "0x10", "1e", "1 2", "1.2.3", "12,34,56", "٣", "1..2", "--1", "1" * 61, "V"]
)
def test_what_is_no_number(cell: str) -> None:
    assert number_in(cell, ".") is None


@pytest.mark.parametrize("cell", ["", " ", "NaN", "-", "n/a", "#N/A", "inf", "1.#QNAN", "1e999"])
def test_blanks(cell: str) -> None:
    value = number_in(cell, ".")
    assert value is not None
    assert value != value
