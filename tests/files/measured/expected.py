"""What each file of tests/data/measured must read as. All figures are invented."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

#: Voltages [V] of most sweeps, with the current densities [mA cm⁻²] upwards, downwards (by voltage) and in the dark.
V = (0.0, 0.2, 0.4, 0.6, 0.8, 1.0, 1.1)
UP = (21.5, 21.4, 21.3, 20.9, 17.0, 2.0, -12.0)
DOWN = (21.5, 21.45, 21.4, 21.1, 17.8, 3.1, -10.5)
DARK = (0.0, -0.0002, -0.001, -0.012, -0.9, -14.0, -32.5)
#: Wavelengths [nm] and quantum efficiencies.
NM = (300.0, 350.0, 400.0, 450.0, 500.0, 550.0, 600.0, 650.0, 700.0, 750.0, 800.0, 850.0)
EQE = (0.42, 0.61, 0.745, 0.81, 0.853, 0.871, 0.88, 0.874, 0.85, 0.79, 0.36, 0.02)
HC = 1239.8419843320026  # h c / q [eV nm], exact by the SI (2019), to the last digit of a float


@dataclass(frozen=True)
class Sweep:
    """A sweep that a file holds."""

    voltage: tuple[float, ...] = V
    current: tuple[float, ...] = UP
    is_density: bool = True
    area_cm2: float | None = None
    direction: str = "forward"
    lit: bool | None = True
    label: str = ""

    def scaled(self, factor: float) -> Sweep:
        """Currents [mA] of a cell of `factor` cm²."""
        return replace(self, current=tuple(factor * j for j in self.current), is_density=False)


@dataclass(frozen=True)
class Curve:
    """Any other curve: its two columns in physical units."""

    x: tuple[float, ...]
    y: tuple[float, ...]
    label: str = ""
    quantity: str = "eqe"
    is_density: bool = True
    area_cm2: float | None = None


@dataclass(frozen=True)
class Case:
    """A file, what it is, its curves, and what is asked and told about it."""

    name: str
    kind: Literal["jv", "eqe", "intensity", "spectrum"]
    curves: tuple[Sweep | Curve, ...]
    questions: tuple[str, ...] = ()
    problems: tuple[str, ...] = ()
    encoding: str = "utf-8"


LIGHT = Sweep()
BACK = Sweep(V[::-1], DOWN[::-1], direction="reverse")
WHOLE_EQE = Curve(NM, EQE)


def no_unit(column: int, line: int, unit: str, name: str = "") -> str:
    """The question about a column without a unit."""
    named = f", “{name}”," if name else ""
    return f"Column {column} at line {line}{named} has no unit: it is taken as {unit}."


def no_names(line: int, what: str) -> str:
    """The question about columns without names."""
    return f"The columns at line {line} have no known names: they are taken as {what}."


JV, SPECTRAL = "a current–voltage sweep", "a quantum efficiency"

READ = (
    Case("tab_plain.txt", "jv", (LIGHT,)),
    Case("comma_bom_crlf.csv", "jv", (LIGHT,), encoding="utf-8-sig"),
    Case("semicolon_decimal_comma.csv", "jv", (LIGHT,)),
    Case("latin1_superscript.csv", "jv", (LIGHT,), encoding="cp1252"),
    Case("utf16le_bom.txt", "jv", (LIGHT,), encoding="utf-16"),
    Case("utf16be_bom.txt", "jv", (LIGHT,), encoding="utf-16"),
    Case("utf16le_no_bom.txt", "jv", (LIGHT.scaled(1e-3),), encoding="utf-16-le"),
    Case("utf16be_no_bom.txt", "jv", (LIGHT,), encoding="utf-16-be"),
    Case("cr_only.txt", "jv", (LIGHT,)),
    Case("mixed_line_ends.txt", "jv", (LIGHT,)),
    Case("blanks_aligned.dat", "jv", (LIGHT,)),
    Case("long_header.txt", "jv", (replace(LIGHT, area_cm2=0.09),)),
    Case("comments.txt", "jv", (LIGHT,)),
    Case("units_below.txt", "jv", (LIGHT,)),
    Case("millivolt_a_per_m2.txt", "jv", (LIGHT,)),
    Case("microampere_area_mm2.txt", "jv", (replace(LIGHT.scaled(0.09), area_cm2=0.09),)),
    Case("ampere_negative_photocurrent.csv", "jv", (replace(LIGHT.scaled(0.25), area_cm2=0.25),), encoding="cp1252"),
    Case(
        "forward_reverse_dark_stacked.txt",
        "jv",
        (
            replace(LIGHT, label="Forward scan, light"),
            replace(BACK, label="Reverse scan, light"),
            Sweep(current=DARK, lit=False, label="Dark"),
        ),
    ),
    Case("two_sweeps_blank_line.txt", "jv", (LIGHT, BACK)),
    Case(
        "up_and_down.txt",
        "jv",
        (replace(LIGHT, label="up_and_down, part 1"), replace(BACK, label="up_and_down, part 2")),
    ),
    Case("twice_the_same_way.txt", "jv", (LIGHT, Sweep(current=DOWN))),
    Case(
        "side_by_side_unequal.txt",
        "jv",
        (replace(LIGHT, label="Cell A J"), Sweep(V[:5], DOWN[:5], label="Cell B J")),
    ),
    Case(
        "side_by_side_gap_column.csv",
        "jv",
        (replace(LIGHT, label="J forward"), replace(BACK, label="J reverse")),
    ),
    Case(
        "shared_voltage.csv",
        "jv",
        (
            replace(LIGHT, label="J forward"),
            # Measured downwards, as its name says, and written upwards.
            Sweep(current=DOWN, direction="reverse", label="J reverse"),
            Sweep(current=DARK, lit=False, label="J dark"),
        ),
    ),
    Case("spreadsheet_paste.txt", "jv", (LIGHT.scaled(0.16),)),
    Case("descending.txt", "jv", (Sweep(V[::-1], UP[::-1], direction="reverse"),)),
    Case("duplicate_points.txt", "jv", (Sweep((0.0, *V), (21.7, *UP)),)),
    Case("power_column.txt", "jv", (LIGHT,)),
    Case("point_time_status.csv", "jv", (LIGHT.scaled(1.0),)),
    Case("clock_first_blanks.txt", "jv", (LIGHT,)),
    Case(
        "overload.txt",
        "jv",
        (Sweep((*V[:6], 1.2), (*UP[:6], -30.0)),),
        problems=("Line 8 has “OVERLOAD” in column 2, where a number was expected: it counts as blank.",),
    ),
    Case("facts_in_cells.csv", "jv", (replace(LIGHT.scaled(0.16), area_cm2=0.16, label="Blue 3"),)),
    Case("voltage_of_other_sign.txt", "jv", (LIGHT,)),
    Case("number_styles.txt", "jv", (LIGHT,)),
    Case("named_delimiter.csv", "jv", (LIGHT,)),
    Case("double_spaced.txt", "jv", (LIGHT,)),
    Case("double_encoded_units.txt", "jv", (LIGHT,)),
    Case("quoted_cells.csv", "jv", (LIGHT,)),
    Case("stray_quote.txt", "jv", (LIGHT,)),
    Case("units_written_large.txt", "jv", (LIGHT.scaled(1.0),)),
    Case(
        "light_levels_as_names.txt",
        "jv",
        (replace(LIGHT, label="100 mW J"), Sweep(current=tuple(j / 2 for j in UP), label="50 mW J")),
    ),
    Case(
        "numbers_above_and_below.txt",
        "jv",
        (replace(LIGHT, area_cm2=0.09),),
        problems=(
            "Line 2, “0.09\\t25”, does not fit the table beside it: it was passed over.",
            "Line 13, “21.5\\t1.02\\t79.1”, does not fit the table beside it: it was passed over.",
        ),
    ),
    Case(
        "dark_only.txt",
        "jv",
        (Sweep((-0.4, -0.2, *V), (2e-4, 1e-4, *DARK), lit=False),),
    ),
    Case(
        "doubtful_commas.txt",
        "jv",
        (Sweep((1e-3, 1.1e-3, 1.15e-3, 1.2e-3), (1.935e-3, 1.926e-3, 1.917e-3, 1.881e-3), is_density=False),),
        questions=(
            "The commas in the numbers, as in “1,000” on line 2, can be decimal marks or part thousands: "
            "they are taken as decimal marks.",
        ),
    ),
    Case(
        "settled_commas.txt",
        "jv",
        (Sweep((0.0005, 0.2005, 0.4005, 1.0005), (1.935, 1.926, 1.917, 0.18), is_density=False),),
    ),
    Case("thousands_dots.csv", "jv", (Sweep((0.0, 0.4, 0.8, 1.0), (1.935, 1.9175, 1.53025, 0.18), is_density=False),)),
    Case("thousands_blanks.txt", "jv", (Sweep((0.0, 0.4, 0.8, 1.0), (1.9355, 1.9175, 1.53, 0.18), is_density=False),)),
    Case(
        "mixed_marks.txt",
        "jv",
        (LIGHT,),
        problems=("There are decimal commas and decimal points: each number is read by its own mark.",),
    ),
    Case("headerless_jv.txt", "jv", (LIGHT,), (no_names(1, JV), no_unit(1, 1, "V"), no_unit(2, 1, "mA/cm²"))),
    Case(
        "headerless_milliampere.txt",
        "jv",
        (Sweep((-0.1, *V), (1.94, *(0.09 * j for j in UP)), is_density=False),),
        (no_names(1, JV), no_unit(1, 1, "V"), no_unit(2, 1, "A")),
    ),
    Case(
        "headerless_pairs.txt",
        "jv",
        (LIGHT, Sweep(current=DOWN)),
        (no_names(1, JV), *(no_unit(place, 1, ("mA/cm²", "V")[place % 2]) for place in (1, 2, 3, 4))),
    ),
    Case("headerless_numbered.txt", "jv", (LIGHT,), (no_names(1, JV), no_unit(2, 1, "V"), no_unit(3, 1, "mA/cm²"))),
    Case("headerless_eqe.txt", "eqe", (WHOLE_EQE,), (no_names(1, SPECTRAL), no_unit(1, 1, "nm"), no_unit(2, 1, "%"))),
    Case("eqe_percent.csv", "eqe", (WHOLE_EQE,)),
    Case("eqe_fraction_micrometre.txt", "eqe", (WHOLE_EQE,), (no_unit(2, 2, "fraction", "IPCE"),)),
    Case(
        "eqe_electronvolt.txt",
        "eqe",
        (Curve(tuple(HC / e for e in (3.0, 2.5, 2.0, 1.6, 1.55, 1.5)), (0.7, 0.85, 0.88, 0.8, 0.4, 0.02)),),
    ),
    Case("eqe_percent_in_cells.csv", "eqe", (WHOLE_EQE,), (no_unit(1, 2, "nm", "Wavelength"),)),
    Case(
        "eqe_duplicates_descending.txt",
        "eqe",
        (replace(WHOLE_EQE, y=(*EQE[:4], 0.863, *EQE[5:])),),  # 500 nm twice: 85.3 and 87.3 %
    ),
    Case(
        "eqe_and_reflectance.txt",
        "eqe",
        (replace(WHOLE_EQE, label="EQE"), Curve(NM, (0.125,) * 12, "Reflectance", "reflectance")),
    ),
    Case("heading_on_every_page.txt", "eqe", (WHOLE_EQE,)),
    Case(
        "spectral_response.txt",
        "eqe",
        (Curve((400.0, 500.0, 600.0, 700.0), (0.2 * HC / 400, 0.3 * HC / 500, 0.4 * HC / 600, 0.45 * HC / 700)),),
    ),
    Case("spectrum_micrometre.txt", "spectrum", (Curve((300.0, 500.0, 1000.0, 2000.0), (0.01, 1.5, 0.7, 0.09)),)),
    Case("spectrum_milliwatt.txt", "spectrum", (Curve((400.0, 500.0, 600.0, 700.0), (1.0, 1.4, 1.5, 1.3)),)),
    Case("intensity_series.csv", "intensity", (Curve((0.215, 2.15, 10.7, 21.5), (0.91, 0.99, 1.05, 1.08)),)),
    Case(
        "intensity_currents.txt",
        "intensity",
        (Curve((0.5, 2.0, 5.0), (0.91, 0.96, 1.01), is_density=False, area_cm2=0.25),),
    ),
)

#: File and the exact refusal.
REFUSED = (
    ("empty.txt", "“empty.txt” is empty: a table of numbers was expected from line 1 on."),
    ("blank_lines.txt", "“blank_lines.txt” is empty: a table of numbers was expected from line 1 on."),
    (
        "prose.txt",
        "“prose.txt” has no table: line 1 reads “Dear all,”, and rows of two or more numbers were expected.",
    ),
    (
        "page_of_a_website.html",
        "“page_of_a_website.html” has no table: line 1 reads “<html>”, and rows of two or more numbers were expected.",
    ),
    (
        "one_column.txt",
        "“one_column.txt” has no table: line 2 reads “21.5”, and rows of two or more numbers were expected.",
    ),
    (
        "two_points.txt",
        "Columns 1 and 2 at line 2 of “two_points.txt” hold 2 points between them: "
        "3 or more rows of numbers were expected.",
    ),
    ("workbook.xlsx", "“workbook.xlsx” is a workbook or archive, not text: save its sheet as CSV text."),
    ("zero_bytes.dat", "“zero_bytes.dat” is not text, line 3 holds a zero byte: save it as CSV text in UTF-8."),
    (
        "damaged_utf8.txt",
        "Line 3 of “damaged_utf8.txt” has bytes that are no UTF-8 text: save it as CSV text in UTF-8 once more.",
    ),
    (
        "eqe_9000_percent.txt",
        "Line 4, column 2 of “eqe_9000_percent.txt” holds 9000 %: an efficiency between 0 and 100 % was expected.",
    ),
    (
        "eqe_percent_called_fraction.txt",
        "Line 2, column 2 of “eqe_percent_called_fraction.txt” holds 42, which is 4200 %: "
        "an efficiency between 0 and 100 % was expected.",
    ),
    (
        "commas_for_everything.csv",
        "Line 2 of “commas_for_everything.csv” has commas both as decimal marks and between its columns: "
        "decimal points, or semicolons between the columns, were expected.",
    ),
    (
        "no_currents.txt",
        "Columns 1 and 2 at line 2 of “no_currents.txt” hold 1 point between them: "
        "3 or more rows of numbers were expected.",
    ),
    (
        "unknown_unit.txt",
        "Column 2 at line 2 of “unknown_unit.txt” has the unit “a.u.”: "
        "one of mA/cm², A/cm², µA/cm², nA/cm², A/m², mA/m² was expected.",
    ),
    (
        "voltage_never_changes.txt",
        "Column 1 of “voltage_never_changes.txt” stays at 0.5 V from line 2 on: voltages that change were expected.",
    ),
    (
        "wavelength_zero.txt",
        "Line 2, column 1 of “wavelength_zero.txt” holds 0 nm: a wavelength or energy above zero was expected.",
    ),
    (
        "wavelength_called_micrometre.txt",
        "Line 2, column 1 of “wavelength_called_micrometre.txt” holds 300 µm: "
        "a wavelength between 100 and 20000 nm was expected.",
    ),
    (
        "one_wavelength.txt",
        "Column 1 of “one_wavelength.txt” has fewer than 3 different values from line 2 on: a curve was expected.",
    ),
    (
        "lying_on_its_side.csv",
        "The table at line 1 of “lying_on_its_side.csv” lies on its side: "
        "a column for each quantity, and a row for each point, were expected.",
    ),
    (
        "no_known_meaning.txt",
        "What the 2 columns at line 2 of “no_known_meaning.txt” are cannot be told: "
        "names such as voltage and current, or wavelength and EQE, were expected above them.",
    ),
)
