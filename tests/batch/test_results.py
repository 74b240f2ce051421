"""What the three tables hold: right numbers, in full, under the promised columns."""

from __future__ import annotations

import codecs
import csv
import io
import tempfile
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.batch.command import run
from app.batch.portions import RESULTS, portions_of
from app.cell_curves import with_curves
from app.cells import shelf_of
from app.files.tables import load_table
from app.session.appraisal import appraise
from app.session.light import light_named
from app.session.outcome import picture_of
from app.session.state import Choices
from app.wording import basis_text
from physics.attribution import Attribution
from tests.batch.command_line import GOOD, HEADER, ROOT, Command, Run, rows_of

DATA = Path(__file__).parents[1] / "data" / "cells"
DEMO = ROOT / "resources" / "demo_cells.csv"


def lines_of(done: Run, name: str) -> dict[str, dict[str, str]]:
    """The ledger of one cell by line."""
    return {row["line"]: row for row in done.rows("ledger") if row["name"] == name}


def test_columns_are_those_of_the_contract(command: Command) -> None:
    done = command(DEMO)
    assert ",".join(done.rows("ledger")[0]) == (
        "name,group,line,family,section,loss_mW_cm2,loss_pct,delta,delta_unit,basis,low95_pct,high95_pct"
    )
    assert ",".join(done.rows("summary")[0]) == (
        "name,group,gap_eV,voc_V,jsc_mA_cm2,ff_pct,temperature_C,irradiance_mW_cm2,ideality,rs_ohm_cm2,rsh_ohm_cm2,"
        "pseudo_ff_pct,area_cm2,spectrum,reference,story,"
        "jsc_limit_mA_cm2,voc_limit_V,ff_limit_pct,pce_limit_pct,pce_pct,ere,voc_rad_V,j0_limit_mA_cm2,j0_rad_mA_cm2,"
        "closure_mW_cm2"
    )
    assert (done.folder / "problems.csv").read_text() == "name,field,severity,message\n"


def test_demo_cells_are_all_computed(command: Command) -> None:
    done = command(DEMO)
    names = [row["name"] for row in done.rows("summary")]
    assert names == ["Plover 3", "Plover 8", "Curlew 5", "Dunlin 2", "Heron 1", "Teal 6"]
    assert done.status == 0
    assert done.out == f"6 cells computed, 0 refused, 0 doubtful figures; see “{done.folder}”\n"
    assert list(dict.fromkeys(row["name"] for row in done.rows("ledger"))) == names
    assert {row["section"] for row in done.rows("ledger")} == {"sun-to-limit", "limit-to-cell"}


def test_ledger_of_the_certified_silicon_cell(command: Command) -> None:
    """Solar Cell Efficiency Tables, 26.7 % silicon cell: 0.738 V, 42.65 mA cm⁻², 84.9 % (published).

    Its log-mean ledger against a 1.12 eV step under AM1.5G as tabulated was recomputed apart from the project:
    current 0.80511, voltage 5.21693, fill factor 0.75094, together 6.77298 mW cm⁻². That took the limit rounded to
    43.8108 mA cm⁻², 0.878263 V and 0.870533; half a unit of their last digits is worth 3.5e-5, 1.9e-5 and
    1.8e-5 mW cm⁻² (times 0.70 V, 37.6 mA cm⁻², 34.8 mW cm⁻²), and 5e-6 the last digit of the result: 4e-5, 2.4e-5,
    2.3e-5, together 8.7e-5.
    """
    tabulated = repr(light_named("am15g").power)
    done = command(f"{HEADER},irradiance_mW_cm2\nSi,1.12,0.738,42.65,84.9,{tabulated}\n")
    assert done.status == 0
    lines = lines_of(done, "Si")

    def total(*families: str) -> float:
        rows = [r for r in lines.values() if r["section"] == "limit-to-cell" and r["family"] in families]
        assert rows
        return sum(float(row["loss_mW_cm2"]) for row in rows)

    assert total("spectral") == pytest.approx(0.80511, abs=4e-5)
    assert total("voltage", "non-radiative") == pytest.approx(5.21693, abs=2.4e-5)
    assert total("fill-factor") == pytest.approx(0.75094, abs=2.3e-5)
    assert total("spectral", "voltage", "non-radiative", "fill-factor") == pytest.approx(6.77298, abs=8.7e-5)
    summary = done.rows("summary")[0]
    # The same source, for the limit: 43.8108 mA cm⁻², 0.878263 V, 0.870533.
    assert float(summary["jsc_limit_mA_cm2"]) == pytest.approx(43.8108, abs=5e-5)
    assert float(summary["voc_limit_V"]) == pytest.approx(0.878263, abs=5e-7)
    assert float(summary["ff_limit_pct"]) == pytest.approx(87.0533, abs=5e-5)


def test_certified_efficiencies(command: Command) -> None:
    """Voc·Jsc·FF meets the published efficiency within the rounding of the figures (0.05 % and the digits of FF)."""
    done = command(DATA / "certified.csv")
    assert done.status == 0
    for row in done.rows("summary"):
        assert float(row["pce_pct"]) == pytest.approx(float(row["given_pce_pct"]), abs=0.08)
    assert "The column “pce_pct” stands in summary.csv as “given_pce_pct”: pce_pct is a result there.\n" in done.out


@pytest.mark.parametrize("attribution", ["log-mean", "ladder"])
def test_same_as_the_window(command: Command, attribution: Attribution) -> None:
    """Line by line what the window shows of the same cells.

    The window works out one cell at a time: numpy's exp for single numbers may differ by an ulp from that for arrays,
    and series and iterations may stop a step earlier.
    """
    choices = Choices(attribution=attribution)
    done = command(DEMO, "--attribution", attribution)
    shelf = shelf_of(load_table(DEMO), DEMO.name)
    entries = [with_curves(entry, row, DEMO.parent)[0] for entry, row in zip(shelf.entries, shelf.rows, strict=True)]
    for entry, summary in zip(entries, done.rows("summary"), strict=True):
        picture = picture_of(appraise(entry, choices), choices)
        assert picture is not None
        lines = lines_of(done, entry.name)
        shown = [e for e in picture.ledger.entries if e.present]
        assert list(lines) == [e.line.key for e in shown]
        for e in shown:
            row = lines[e.line.key]
            unit = {"V": "V", "mA cm⁻²": "mA/cm2", "": "%", "mW cm⁻²": "mW/cm2"}[e.line.factor.unit]
            assert row["delta_unit"] == unit
            factor = 100.0 if unit == "%" else 1.0
            # A line that is zero by cancellation keeps the rounding of the numbers it is the difference of.
            assert float(row["delta"]) == pytest.approx(factor * float(e.delta), rel=1e-12, abs=1e-13)
            assert float(row["loss_mW_cm2"]) == pytest.approx(float(e.loss), rel=1e-12, abs=1e-13)
            assert row["basis"] == basis_text(e.form_at())
            assert row["family"] == e.line.family.value
            assert row["section"] == e.line.section.value
        assert float(summary["ere"]) == pytest.approx(float(picture.ledger.ere), rel=1e-11)


@pytest.mark.parametrize("table", [DEMO, DATA / "certified.csv"], ids=["demo", "certified"])
def test_lines_add_up(command: Command, table: Path) -> None:
    done = command(table)
    for summary in done.rows("summary"):
        lines = [row for row in done.rows("ledger") if row["name"] == summary["name"]]
        losses = sum(float(row["loss_mW_cm2"]) for row in lines)
        power = float(summary["voc_V"]) * float(summary["jsc_mA_cm2"]) * float(summary["ff_pct"]) / 100.0
        # 100 mW cm⁻² of some 15 terms, each rounded to 1 in 2⁵³.
        assert losses + power == pytest.approx(100.0, abs=1e-12)
        assert abs(float(summary["closure_mW_cm2"])) < 1e-12
        shares = sum(float(row["loss_pct"]) for row in lines)
        assert shares + float(summary["pce_pct"]) == pytest.approx(100.0, abs=1e-12)


def test_defaults_are_filled_in(command: Command) -> None:
    summary = command(f"{HEADER}\n{GOOD}\n").rows("summary")[0]
    assert {k: summary[k] for k in ("temperature_C", "irradiance_mW_cm2", "spectrum", "reference")} == {
        "temperature_C": "25.0",
        "irradiance_mW_cm2": "100.0",
        "spectrum": "am15g",
        "reference": "step",
    }
    assert summary["area_cm2"] == summary["ideality"] == ""


def test_ere_is_the_measured_one_or_by_reciprocity(command: Command) -> None:
    done = command(f"{HEADER},ere\nmeasured,1.6,1.05,23.9,77.6,0.00001\nunmeasured,1.6,1.05,23.9,77.6,\n")
    measured, unmeasured = done.rows("summary")
    assert measured["ere"] == "1e-05"
    # Rau 2007, doi:10.1103/PhysRevB.76.085303: Voc = Voc_rad + (kT/q) ln ERE; kT/q at 25 °C by CODATA.
    expected = np.exp((1.05 - float(unmeasured["voc_rad_V"])) / 0.025692579121493725)
    assert float(unmeasured["ere"]) == pytest.approx(expected, rel=1e-12)


def test_rows_keep_their_order_across_lights(command: Command) -> None:
    lights = ["am0", "am15g", "blackbody:6000", "am15g", "am0", "am15d"]
    rows = "".join(f"c{k},1.6,1.0,14,75,{light}\n" for k, light in enumerate(lights))
    done = command(f"{HEADER},spectrum\n{rows}")
    assert [row["name"] for row in done.rows("summary")] == [f"c{k}" for k in range(6)]
    assert [row["spectrum"] for row in done.rows("summary")] == lights
    assert list(dict.fromkeys(row["name"] for row in done.rows("ledger"))) == [f"c{k}" for k in range(6)]
    limits = [row["jsc_limit_mA_cm2"] for row in done.rows("summary")]
    assert limits[0] == limits[4]
    assert limits[1] == limits[3]
    assert len(set(limits)) == 4


def test_a_name_may_stand_in_two_groups(command: Command) -> None:
    done = command("name,group,gap_eV,voc_V,jsc_mA_cm2,ff_pct\na,x,1.6,1,20,75\na,y,1.6,1,20,75\na,x,1.6,1,20,75\n")
    assert done.status == 1
    assert [(row["name"], row["group"]) for row in done.rows("summary")] == [("a", "x"), ("a", "y")]
    assert [p[3] for p in done.problems()] == [
        "Line 4: The name “a” stands already in line 2: give every cell of a group a name of its own."
    ]


def test_other_columns_travel_along(command: Command) -> None:
    done = command(
        f"{HEADER},note,line,closure_mW_cm2,given_closure_mW_cm2,operator\n"
        'a,1.6,1.05,23.9,77.6,"one, ""two""",007,x,y,=1+1\n'
    )
    row = done.rows("summary")[0]
    assert (row["note"], row["line"]) == ('one, "two"', "007")
    assert (row["given_given_closure_mW_cm2"], row["given_closure_mW_cm2"]) == ("x", "y")
    assert row["operator"] == "'=1+1"
    assert abs(float(row["closure_mW_cm2"])) < 1e-12


@pytest.mark.parametrize("text", ["=SUM(A1)", "+cmd", "-x", "@me", "＝1", "\t=1"])
def test_formulas_in_names_are_made_harmless(command: Command, text: str) -> None:
    cell = io.StringIO()
    csv.writer(cell).writerow([text])
    done = command(f"name,gap_eV,voc_V,jsc_mA_cm2,ff_pct\n{cell.getvalue().strip(chr(13) + chr(10))},1.6,1.4,15,77\n")
    assert done.problems()[0][0] == f"'{text.strip()}"
    done = command(f"name,gap_eV,voc_V,jsc_mA_cm2,ff_pct\n{cell.getvalue().strip(chr(13) + chr(10))},1.6,1,15,77\n")
    assert {row["name"] for name in ("ledger", "summary") for row in done.rows(name)} == {f"'{text.strip()}"}


DIALECTS = ["comma.csv", "bom_crlf.csv", "semicolon_decimal_comma.csv", "tab.tsv", "utf16_tab.txt"]


@pytest.mark.parametrize("name", DIALECTS)
def test_every_dialect_gives_the_same_tables(command: Command, name: str) -> None:
    plain = command(DATA / DIALECTS[0], into="plain")
    done = command(DATA / name)
    assert plain.status == done.status == 0
    assert [row["name"] for row in plain.rows("summary")] == ["Ülo, 1", "µ-cell"]
    for table in ("ledger", "summary", "problems"):
        assert (done.folder / f"{table}.csv").read_bytes() == (plain.folder / f"{table}.csv").read_bytes()


def test_windows_western_table(command: Command) -> None:
    done = command(DATA / "windows_western_semicolon.csv")
    assert [(row["name"], row["group"]) for row in done.rows("summary")] == [("Ülo, 1", "ö lab"), ("µ-cell", "ö lab")]
    assert done.rows("summary")[0]["voc_V"] == "0.738"


def test_the_dialects_are_what_their_names_say() -> None:
    """Guards the files against tools that mend line ends."""
    assert (DATA / "bom_crlf.csv").read_bytes().startswith(codecs.BOM_UTF8)
    assert (DATA / "bom_crlf.csv").read_bytes().count(b"\r\n") == 3
    assert (DATA / "utf16_tab.txt").read_bytes().startswith(codecs.BOM_UTF16_LE)
    assert b"0,738" in (DATA / "semicolon_decimal_comma.csv").read_bytes()
    assert b"\t0.738\t" in (DATA / "tab.tsv").read_bytes()
    assert "Ülo".encode("cp1252") in (DATA / "windows_western_semicolon.csv").read_bytes()


def test_a_summary_can_be_worked_out_again(command: Command) -> None:
    first = command(DATA / "certified.csv", into="first")
    again = command(first.folder / "summary.csv", into="again")
    assert again.status == 0
    for old, new in zip(first.rows("summary"), again.rows("summary"), strict=True):
        assert {c: new[c] for c in RESULTS if not c.startswith("closure")} == {
            c: old[c] for c in RESULTS if not c.startswith("closure")
        }
        assert new["given_voc_rad_V"] == old["voc_rad_V"]


def _within(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, exclude_min=True, allow_nan=False)


@settings(max_examples=60, deadline=None)
@given(
    voc=_within(0.2, 1.0), jsc=_within(1.0, 24.0), ff=_within(30.0, 85.0), gap=_within(1.5, 1.7),
    temperature=_within(-50.0, 90.0), area=_within(0.0, 1e5), ere=_within(1e-12, 1.0),
)  # fmt: skip
def test_numbers_read_back_bit_for_bit(
    voc: float, jsc: float, ff: float, gap: float, temperature: float, area: float, ere: float
) -> None:
    given_row = (gap, voc, jsc, ff, temperature, area, ere)
    with tempfile.TemporaryDirectory() as folder:
        home = Path(folder)
        cells = home / "cells.csv"
        cells.write_text(f"{HEADER},temperature_C,area_cm2,ere\na,{','.join(map(repr, given_row))}\n")
        assert run([str(cells), "--into", str(home / "out")]) == 0
        (summary,) = rows_of(home / "out" / "summary.csv")
        columns = ("gap_eV", "voc_V", "jsc_mA_cm2", "ff_pct", "temperature_C", "area_cm2", "ere")
        assert tuple(float(summary[column]) for column in columns) == given_row
        (portion,) = portions_of(load_table(cells), "log-mean", cells.parent)
        written = rows_of(home / "out" / "ledger.csv")
        present = portion.form[0] >= 0
        assert [float(row["loss_mW_cm2"]) for row in written] == portion.loss[0, present].tolist()
        assert [float(summary[column]) for column in RESULTS] == portion.results[0].tolist()
        (entry,) = shelf_of(load_table(cells), cells.name).entries
        ledger = appraise(entry, Choices()).ledger
        assert ledger is not None
        # numpy's exp for arrays and for single numbers may differ by an ulp, which J0 ~ exp(-Eg/kT) passes on.
        assert portion.loss[0, present] == pytest.approx(
            [float(e.loss) for e in ledger.entries if e.present], rel=1e-12, abs=1e-12
        )
