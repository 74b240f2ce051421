"""The ledger as a whole: it adds up, its lines are those of a second calculation, no cell disturbs another."""

import math
from collections import defaultdict

import numpy as np
import pytest
from numpy.typing import NDArray

from physics.attribution import ATTRIBUTIONS, Attribution
from physics.cell import Cell
from physics.emission import BlackBody
from physics.ledger import Ledger, entries_of, ledger_against, ledger_of
from physics.limit import Faces, detailed_balance_limit
from physics.lines import CURRENT, FILL, LINES, VOLTAGE, Basis, Section
from physics.spectrum import Illumination, Spectrum, reference_spectrum

from . import brute
from .cells import random_cells

Array = NDArray[np.float64]
AM15G = reference_spectrum("am15g")
LAMP = Spectrum("lamp", np.array([300.0, 450.0, 455.0, 650.0, 2800.0]), np.array([0.0, 0.02, 0.3, 0.1, 0.0]))
LIGHTS: dict[str, Illumination] = {
    "am15g": AM15G,
    "am15d": reference_spectrum("am15d"),
    "am0": reference_spectrum("am0"),
    "sun": BlackBody(5800.0),
    "lamp": LAMP,
}
CLOSURE = 1e-9  # mW cm⁻²
CELL_FIELDS = tuple(Cell.__dataclass_fields__)


def _check_sums(ledger: Ledger) -> None:
    """Nothing is lost on the whole way, in either half, or in any factor."""
    cell, limit = ledger.cell, ledger.limit
    assert np.abs(ledger.closure).max() < CLOSURE
    for section, whole in (
        (Section.SUN_TO_LIMIT, limit.incident - limit.power),
        (Section.LIMIT_TO_CELL, limit.power - cell.power),
    ):
        total = sum((entry.loss for entry in entries_of(ledger, section)), np.zeros(cell.shape))
        np.testing.assert_allclose(total, whole, rtol=0, atol=CLOSURE)
    by_factor: dict[int, Array] = defaultdict(lambda: np.zeros(cell.shape))
    for entry in entries_of(ledger, Section.LIMIT_TO_CELL):
        by_factor[id(entry.line.factor)] = by_factor[id(entry.line.factor)] + entry.delta
        assert (entry.delta[~entry.present] == 0).all()
        assert (entry.loss[~entry.present] == 0).all()
    assert set(by_factor) == {id(CURRENT), id(VOLTAGE), id(FILL)}
    np.testing.assert_allclose(by_factor[id(CURRENT)], limit.jsc - cell.jsc, rtol=0, atol=1e-12 * limit.jsc.max())
    np.testing.assert_allclose(by_factor[id(VOLTAGE)], limit.voc - cell.voc, rtol=0, atol=1e-13)
    np.testing.assert_allclose(by_factor[id(FILL)], limit.ff - cell.ff, rtol=0, atol=1e-13)


@pytest.mark.parametrize("attribution", ATTRIBUTIONS)
@pytest.mark.parametrize("faces", [1, 2])
def test_ten_thousand_random_cells_close(attribution: Attribution, faces: Faces) -> None:
    cells = random_cells(10_000, AM15G, seed=100 + faces)
    ledger = ledger_of(cells, AM15G, attribution, faces)
    _check_sums(ledger)
    # The cells are what they should be: every line is negative somewhere and positive somewhere, where it can be.
    for entry in entries_of(ledger, Section.LIMIT_TO_CELL):
        assert entry.present.any()
        if entry.line.key != "sub_gap_current":  # always a gain
            assert (entry.delta > 0).any(), entry.line.key
    negative = ("current", "uncollected", "sub_gap_current", "current_mismatch", "voltage_edge",
                "voltage_low_current", "nonradiative", "voltage_residual", "fill_voltage", "fill_ideality",
                "fill_recombination", "fill_transport", "fill_residual")
    for key in negative:
        assert (ledger[key].loss < 0).any(), key
    for name in ("ere", "ideality", "rs", "rsh", "pseudo_ff", "eqe_above", "reflected", "j0_rad"):
        known = ~np.isnan(getattr(cells, name))
        assert 0.4 < known.mean() < 0.6


@pytest.mark.parametrize("name", LIGHTS)
@pytest.mark.parametrize("irradiance", [1e-3, 100.0, 1000.0])
def test_every_light_and_irradiance_closes(name: str, irradiance: float) -> None:
    for attribution in ATTRIBUTIONS:
        cells = random_cells(400, LIGHTS[name], seed=7, irradiance=irradiance)
        _check_sums(ledger_of(cells, LIGHTS[name], attribution))


@pytest.mark.parametrize("attribution", ATTRIBUTIONS)
def test_figures_far_from_their_limits_close_too(attribution: Attribution) -> None:
    """Wherever a figure may be typed: decades above and below its limit."""
    rng = np.random.default_rng(3)
    cells = random_cells(2000, AM15G, seed=9, irradiance=100.0)
    wild = Cell.of(
        gap=cells.gap, voc=10.0 ** rng.uniform(-4, 0.7, 2000), jsc=10.0 ** rng.uniform(-6, 5, 2000),
        ff=rng.uniform(0.01, 1.0, 2000), temperature=rng.uniform(173.15, 473.15, 2000),
    )
    ledger = ledger_of(wild, AM15G, attribution)
    largest = np.maximum(ledger.limit.incident, wild.power)
    assert (np.abs(ledger.closure) < 1e-12 * largest * 100).all()


@pytest.mark.parametrize("attribution", ATTRIBUTIONS)
@pytest.mark.parametrize("faces", [1, 2])
def test_a_cell_that_equals_its_limit_has_no_losses_past_it(attribution: Attribution, faces: Faces) -> None:
    gap = np.linspace(0.5, 3.0, 200)
    limit = detailed_balance_limit(gap, 298.15, AM15G, 100.0, faces)
    cell = Cell.of(gap=gap, voc=limit.voc, jsc=limit.jsc, ff=limit.ff)
    perfect = Cell.of(gap=gap, voc=limit.voc, jsc=limit.jsc, ff=limit.ff, ere=1.0, ideality=1.0, rs=0.0, rsh=np.inf)
    for each in (cell, perfect):
        ledger = ledger_of(each, AM15G, attribution, faces)
        for entry in entries_of(ledger, Section.LIMIT_TO_CELL):
            np.testing.assert_allclose(entry.loss, 0.0, atol=1e-12, err_msg=entry.line.key)
        assert np.abs(ledger.closure).max() < CLOSURE
        np.testing.assert_allclose(ledger.efficiency, limit.efficiency, rtol=1e-15)
        np.testing.assert_allclose(ledger.ere, 1.0, rtol=1e-12)


def _row(cells: Cell, index: int) -> dict[str, float]:
    return {name: float(getattr(cells, name)[index]) for name in CELL_FIELDS}


@pytest.mark.parametrize("attribution", ATTRIBUTIONS)
@pytest.mark.parametrize("faces", [1, 2])
def test_every_line_equals_the_second_calculation(attribution: Attribution, faces: Faces) -> None:
    cells = random_cells(60, AM15G, seed=21 + faces, irradiance=100.0)
    ledger = ledger_of(cells, AM15G, attribution, faces)
    seen = set()
    for index in range(60):
        wanted = brute.ledger_of(_row(cells, index), "am15g", attribution, faces)
        present = {entry.line.key for entry in ledger.entries if entry.present[index]}
        assert present == set(wanted)
        seen |= present
        for key, loss in wanted.items():
            assert float(ledger[key].loss[index]) == pytest.approx(loss, abs=2e-8), (index, key)
    assert seen == {line.key for line in LINES}


def test_scalars_equal_the_elements_of_an_array() -> None:
    cells = random_cells(300, AM15G, seed=4, irradiance=100.0)
    together = ledger_of(cells, AM15G)
    for index in range(300):
        alone = ledger_of(Cell.of(**_row(cells, index)), AM15G)
        assert alone.closure.shape == ()
        for one, all_ in zip(alone.entries, together.entries, strict=True):
            assert one.loss.shape == one.delta.shape == one.form.shape == ()
            assert int(one.form) == int(all_.form[index])
            # A difference of fill factors or voltages is good to some units in the last place of the two.
            assert float(one.delta) == pytest.approx(float(all_.delta[index]), rel=0, abs=1e-15), one.line.key
            assert float(one.loss) == pytest.approx(float(all_.loss[index]), rel=0, abs=5e-14), one.line.key


def test_shapes_broadcast() -> None:
    cell = Cell.of(gap=[[1.12], [1.34]], voc=0.7, jsc=[20.0, 30.0, 35.0], ff=0.8, ere=[[np.nan], [0.01]])
    ledger = ledger_of(cell, AM15G)
    assert all(e.loss.shape == e.delta.shape == e.form.shape == (2, 3) for e in ledger.entries)
    assert ledger.closure.shape == ledger.ere.shape == ledger.efficiency.shape == (2, 3)
    np.testing.assert_array_equal(ledger["voltage_residual"].present, [[False] * 3, [True] * 3])
    assert ledger.entries[0].form_at((1, 2)) is LINES[0].forms[0]
    empty = ledger_of(Cell.of(gap=np.empty(0), voc=0.7, jsc=30.0, ff=0.8), AM15G)
    assert empty.closure.shape == (0,)


@pytest.mark.parametrize(
    "odd",
    [
        {"voc": np.nan}, {"jsc": np.nan}, {"ff": np.nan}, {"gap": np.nan}, {"temperature": np.nan},
        {"voc": 0.0}, {"jsc": 0.0}, {"ff": 0.0}, {"gap": 0.0}, {"temperature": 0.0}, {"irradiance": 0.0},
        {"voc": -0.7}, {"jsc": -30.0}, {"ff": -0.8}, {"gap": -1.1}, {"temperature": -20.0}, {"irradiance": -100.0},
        {"gap": 0.2}, {"gap": 9.0}, {"rs": 1e4}, {"rsh": 1.0}, {"rs": -1.0}, {"ere": -0.1}, {"ideality": 0.0},
        {"ideality": -2.0},
    ],
    ids=str,
)  # fmt: skip
def test_one_impossible_cell_is_nan_and_leaves_the_others(odd: dict[str, float]) -> None:
    good = {"gap": 1.12, "voc": 0.7, "jsc": 40.0, "ff": 0.8, "temperature": 298.15, "irradiance": 100.0,
            "ere": 0.002, "ideality": 1.1, "rs": 0.4, "rsh": 5000.0}
    mixed = {key: np.array([value, odd.get(key, value), value]) for key, value in good.items()}
    ledger, alone = ledger_of(Cell.of(**mixed), AM15G), ledger_of(Cell.of(**good), AM15G)
    assert np.isnan(ledger.closure[1])
    assert (np.abs(ledger.closure[[0, 2]]) < CLOSURE).all()
    for mine, other in zip(ledger.entries, alone.entries, strict=True):
        np.testing.assert_allclose(mine.loss[[0, 2]], float(other.loss), rtol=1e-14, atol=1e-13)
        np.testing.assert_array_equal(mine.form[[0, 2]], int(other.form))


def _keys(ledger: Ledger) -> set[str]:
    return {entry.line.key for entry in entries_of(ledger, Section.LIMIT_TO_CELL) if entry.present}


ALWAYS = {"current", "voltage_low_current", "voltage_edge", "nonradiative", "fill_voltage"}
EQE = {"eqe_above": 24.3, "eqe_below": 0.2, "j0_rad": 1e-19}
BY_EQE = {"uncollected", "sub_gap_current", "current_mismatch"}
FIGURES = {"gap": 1.5, "voc": 1.1, "jsc": 24.0, "ff": 0.76}


@pytest.mark.parametrize(
    ("known", "more"),
    [
        ({}, {"fill_residual"}),
        ({"ere": 0.01}, {"voltage_residual", "fill_residual"}),
        ({"ideality": 1.5}, {"fill_ideality", "fill_residual"}),
        ({"rs": 2.0}, {"fill_series", "fill_residual"}),
        ({"rsh": 2e3}, {"fill_shunt", "fill_residual"}),
        ({"ideality": 1.5, "rs": 2.0, "rsh": 2e3}, {"fill_ideality", "fill_series", "fill_shunt", "fill_residual"}),
        ({"pseudo_ff": 0.82}, {"fill_recombination", "fill_transport"}),
        ({"pseudo_ff": 0.82, "rs": 2.0}, {"fill_recombination", "fill_transport", "fill_series"}),
        ({"pseudo_ff": 0.82, "ideality": 1.5}, {"fill_recombination", "fill_transport", "fill_ideality"}),
    ],
    ids=str,
)
def test_lines_follow_what_is_known(known: dict[str, float], more: set[str]) -> None:
    ledger = ledger_of(Cell.of(**FIGURES, **known), AM15G)
    assert _keys(ledger) == ALWAYS | more


@pytest.mark.parametrize(("known", "more"), [({}, set()), ({"reflected": 1.0}, {"reflection"})], ids=str)
def test_an_eqe_splits_the_current(known: dict[str, float], more: set[str]) -> None:
    ledger = ledger_of(Cell.of(**FIGURES, **EQE, **known), AM15G)
    assert _keys(ledger) == (ALWAYS - {"current"}) | BY_EQE | more | {"fill_residual"}
    whole = ledger_of(Cell.of(**FIGURES), AM15G)["current"]
    parts = [ledger[key] for key in BY_EQE | more]
    assert sum(float(part.delta) for part in parts) == pytest.approx(float(whole.delta), abs=1e-13)
    assert float(ledger["sub_gap_current"].delta) == -0.2
    assert float(ledger["current_mismatch"].delta) == pytest.approx(24.3 + 0.2 - 24.0, abs=1e-13)


def test_a_reflectance_without_an_eqe_changes_nothing() -> None:
    assert _keys(ledger_of(Cell.of(**FIGURES, reflected=1.0), AM15G)) == ALWAYS | {"fill_residual"}


def test_a_step_of_eqe_gives_the_step_ledger() -> None:
    limit = detailed_balance_limit(1.5, 298.15, AM15G, 100.0)
    step = ledger_of(
        Cell.of(**FIGURES, eqe_above=float(limit.jsc), eqe_below=0.0, j0_rad=float(limit.j0)), AM15G
    )
    plain = ledger_of(Cell.of(**FIGURES), AM15G)
    for key in ("voltage_low_current", "voltage_edge", "nonradiative", "fill_voltage", "fill_residual"):
        assert float(step[key].loss) == float(plain[key].loss)
    assert float(step["uncollected"].delta) == 0.0
    assert float(step["current_mismatch"].loss) == float(plain["current"].loss)


def test_basis_follows_what_is_known() -> None:
    def basis(key: str, **known: float) -> tuple[Basis, str]:
        form = ledger_of(Cell.of(**FIGURES, **known), AM15G)[key].form_at()
        assert form is not None
        return form.basis, form.reason

    for line in LINES:
        if line.section is Section.SUN_TO_LIMIT:
            assert basis(line.key)[0] is Basis.CALCULATED
    assert basis("current")[0] is Basis.MEASURED
    assert basis("voltage_edge") == (Basis.ASSUMED, "step edge")
    assert basis("nonradiative") == (Basis.ASSUMED, "by reciprocity, with a step edge")
    assert basis("nonradiative", ere=0.01) == (Basis.MEASURED, "from the ERE")
    assert basis("fill_series", rs=1.0) == (Basis.ASSUMED, "n = 1, as no ideality is given")
    assert basis("fill_shunt", rsh=1e3) == (Basis.ASSUMED, "n = 1, as no ideality is given")
    assert basis("fill_series", rs=1.0, ideality=1.4)[0] is Basis.MEASURED
    assert basis("fill_shunt", rsh=1e3, ideality=1.4)[0] is Basis.MEASURED
    assert ledger_of(Cell.of(**FIGURES), AM15G)["fill_series"].form_at() is None
    fit = {"rs": 1.0, "rsh": 1e3, "ideality": 1.4, "fitted": 1.0}
    for key in ("fill_ideality", "fill_series", "fill_shunt"):
        assert basis(key, **fit) == (Basis.FITTED, "one-diode fit to the sweep")
    assert basis("voltage_edge", **EQE) == (Basis.MEASURED, "from the EQE")
    assert basis("voltage_edge", **EQE, tail_share=0.2) == (Basis.FITTED, "from the EQE, its tail extrapolated")
    assert basis("nonradiative", **EQE) == (Basis.MEASURED, "by reciprocity, with the EQE")
    assert basis("nonradiative", **EQE, tail_share=0.2)[0] is Basis.FITTED
    assert basis("nonradiative", **EQE, tail_share=0.2, ere=0.01) == (Basis.MEASURED, "from the ERE")
    assert basis("voltage_residual", **EQE, ere=0.01) == (Basis.MEASURED, "the rest, with the EQE")


def test_without_an_ere_the_voltage_is_whole_and_the_ere_is_implied() -> None:
    cell = Cell.of(**FIGURES)
    ledger = ledger_of(cell, AM15G)
    implied = float(ledger.ere)
    told = ledger_of(Cell.of(**FIGURES, ere=implied), AM15G)
    assert float(told["voltage_residual"].delta) == pytest.approx(0.0, abs=1e-14)
    assert float(told["nonradiative"].loss) == pytest.approx(float(ledger["nonradiative"].loss), rel=1e-12)
    assert float(ledger_of(Cell.of(**FIGURES, ere=0.01), AM15G).ere) == 0.01


def test_the_implied_figure_of_a_line_is_that_of_the_ledger() -> None:
    ledger = ledger_of(Cell.of(**FIGURES), AM15G)
    form = ledger["nonradiative"].form_at()
    assert form is not None
    assert form.implied is not None
    assert float(form.implied.value(ledger.quantities)) == float(ledger.ere)


@pytest.mark.parametrize("faces", [1, 2])
def test_the_product_of_factors_is_the_efficiency(faces: Faces) -> None:
    ledger = ledger_of(random_cells(500, AM15G, seed=5), AM15G, faces=faces)
    factors = ledger.factors()
    assert set(factors) == {"ultimate efficiency", "gap utilisation", "fill factor", "collection"}
    of_limit, of_cell = (math.prod(np.array([pair[k] for pair in factors.values()])) for k in (0, 1))
    np.testing.assert_allclose(of_limit, ledger.limit.efficiency, rtol=1e-14)
    np.testing.assert_allclose(of_cell, ledger.efficiency, rtol=1e-14)
    np.testing.assert_array_equal(factors["ultimate efficiency"][0], factors["ultimate efficiency"][1])
    assert (factors["collection"][0] == 1).all()


def test_a_limit_at_hand_serves_as_well() -> None:
    cells = random_cells(50, AM15G, seed=6)
    limit = detailed_balance_limit(cells.gap, cells.temperature, AM15G, cells.irradiance, 2)
    for mine, other in zip(
        ledger_against(cells, limit).entries, ledger_of(cells, AM15G, faces=2).entries, strict=True
    ):
        np.testing.assert_array_equal(mine.loss, other.loss)


def test_unknown_lines() -> None:
    ledger = ledger_of(Cell.of(**FIGURES), AM15G)
    assert ledger["current"].line.key == "current"
    with pytest.raises(KeyError):
        ledger["sunset"]


def test_irradiance_as_tabulated() -> None:
    ledger = ledger_of(Cell.of(**FIGURES, irradiance=np.nan), AM15G)
    assert float(ledger.limit.incident) == AM15G.power
    assert abs(float(ledger.closure)) < CLOSURE
