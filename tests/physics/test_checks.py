"""The plausibility checks: each is tripped by the cell it is meant for, and by no other."""

from string import Formatter

import numpy as np
import pytest

from physics.cell import Cell
from physics.checks import CHECKS, Check, Severity, failed
from physics.ledger import Ledger, ledger_of
from physics.limit import detailed_balance_limit
from physics.quantities import Quantities
from physics.spectrum import reference_spectrum
from physics.stacks import Luminescence, Stacks

from .published import AUGER_LIMITED_SILICON, CERTIFIED

AM15G = reference_spectrum("am15g")
SOUND = {"gap": 1.5, "voc": 1.1, "jsc": 24.0, "ff": 0.78, "ideality": 1.4, "rs": 1.0, "rsh": 3000.0}


def _yields(bare: float, *contacts: float) -> Stacks:
    of = [Luminescence(fraction=np.float64(value)) for value in (bare, *contacts)]
    return Stacks(of[0], tuple((f"contact {k}", each) for k, each in enumerate(of[1:])))


def _finished(voltage: float) -> Stacks:
    return Stacks(Luminescence(fraction=np.float64(0.03)), (), Luminescence(voltage=np.float64(voltage)))


#: A cell that trips the check, and one a little to the other side of it. The limit of 1.5 eV at 100 mW cm⁻² is
#: 28.98 mA cm⁻², 1.233 V, 28.98 · 1.233 · 0.900 mW cm⁻² (recomputed in test_limit_quadrature.py).
CASES = {
    "not_finite": ({"ere": 0.0}, {"ere": 0.006}),
    "voc_above_limit": ({"voc": 1.24}, {"voc": 1.22}),
    "power_above_limit": ({"jsc": 35.0, "voc": 1.2, "ff": 0.9}, {"jsc": 26.0, "voc": 1.2, "ff": 0.9}),
    "rs_too_large": ({"rs": 46.0}, {"rs": 45.0}),  # Voc/Jsc is 45.83 Ω cm²
    "rsh_too_small": ({"rs": 0.0, "rsh": 45.0}, {"rs": 0.0, "rsh": 46.0}),
    "jsc_above_limit": ({"jsc": 29.1}, {"jsc": 28.9}),
    "voc_above_radiative": ({"voc": 1.225, "jsc": 16.0}, {"voc": 1.205, "jsc": 16.0}),
    "ere_contradicts_voc": ({"ere": 1e-5}, {"ere": 0.006}),
    "currents_disagree": ({"eqe_above": 22.6, "eqe_below": 0.1}, {"eqe_above": 22.8, "eqe_below": 0.1}),
    "ff_above_ideal": ({"ff": 0.90, "ideality": np.nan}, {"ff": 0.88, "ideality": np.nan}),
    "ff_below_quarter": ({"ff": 0.25}, {"ff": 0.26}),
    "pseudo_ff_below_ff": ({"pseudo_ff": 0.77}, {"pseudo_ff": 0.79}),
}


#: Likewise for partial stacks: the bare absorber and either one contact after another, or the finished cell by its
#: implied voltage. Voc is 1.1 V, and 24 mA cm⁻² bring the limit's voltage down to 1.228 V.
STACKS = {
    "stacks_contradict": (_yields(0.03, 0.05, 0.08), _yields(0.03, 0.05, 0.07)),
    "stack_above_radiative": (_finished(1.229), _finished(1.227)),
    "stack_below_voc": (_finished(1.069), _finished(1.071)),
}


def _ledger(changes: dict[str, float] | Stacks) -> Ledger:
    if isinstance(changes, Stacks):
        return ledger_of(Cell.of(**SOUND), AM15G, stacks=changes)
    return ledger_of(Cell.of(**(SOUND | changes)), AM15G)


def _keys(ledger: Ledger) -> set[str]:
    return {check.key for check, _ in failed(ledger)}


def test_a_sound_cell_passes() -> None:
    assert failed(_ledger({})) == []


def test_every_check_has_its_case() -> None:
    assert set(CASES) | set(STACKS) == {check.key for check in CHECKS}
    assert len(CHECKS) == len(CASES) + len(STACKS)


@pytest.mark.parametrize("key", [*CASES, *STACKS])
def test_each_check_on_either_side(key: str) -> None:
    bad, good = (CASES | STACKS)[key]
    assert key in _keys(_ledger(bad))
    assert key not in _keys(_ledger(good))


def test_masks_are_by_cell() -> None:
    ledger = ledger_of(Cell.of(**{k: v for k, v in SOUND.items() if k != "voc"}, voc=[1.1, 1.3, np.nan, 1.1]), AM15G)
    hits = {check.key: mask for check, mask in failed(ledger)}
    np.testing.assert_array_equal(hits["voc_above_limit"], [False, True, False, False])


@pytest.mark.parametrize("check", CHECKS, ids=lambda check: check.key)
def test_messages_name_quantities_and_fields(check: Check) -> None:
    names = {name for _, name, _, _ in Formatter().parse(check.message) if name is not None}
    assert names <= set(Quantities.__dataclass_fields__)
    assert check.field in {*Cell.__dataclass_fields__, "stacks"}
    text = check.message.format(**dict.fromkeys(names, 1.23456))
    assert text.endswith(".")
    assert "{" not in text


def test_a_cell_at_its_limit_is_not_above_it() -> None:
    gap = np.linspace(0.5, 3.0, 300)
    limit = detailed_balance_limit(gap, 298.15, AM15G, 100.0)
    ledger = ledger_of(Cell.of(gap=gap, voc=limit.voc, jsc=limit.jsc, ff=limit.ff), AM15G)
    assert _keys(ledger) == set()


def test_certified_cells_pass_and_auger_limited_silicon_is_only_remarked_on() -> None:
    for cell in CERTIFIED:
        ledger = ledger_of(Cell.of(gap=cell.gap, voc=cell.voc, jsc=cell.jsc, ff=cell.ff / 100), AM15G)
        assert _keys(ledger) == set(), cell.title
    voc, jsc, ff, _ = AUGER_LIMITED_SILICON
    hits = failed(ledger_of(Cell.of(gap=1.12, voc=voc, jsc=jsc, ff=ff), AM15G))
    assert [(check.key, check.severity) for check, _ in hits] == [("ff_above_ideal", Severity.DOUBTFUL)]
