"""Descriptions of charts for the drawing tests. All numbers here are invented: they test drawing, not physics."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from app.figures.spec import Mark, PlotSpec, Role, Segment, Series, Step, WaterfallSpec

FAMILIES: tuple[tuple[Role, str], ...] = (
    ("spectral", "Spectral"),
    ("voltage", "Voltage"),
    ("fill-factor", "Fill factor"),
    ("non-radiative", "Non-radiative"),
)


def percent(value: float) -> str:
    return f"{value:.2f} %".replace("-", "−")


def segments(
    below: float = 18.96, heat: float = 33.19, voltage: float = 9.19, fill: float = 5.18
) -> tuple[Segment, ...]:
    rest = 100 - below - heat - voltage - fill
    rows: list[tuple[str, str, str, float, Role]] = [
        ("below_gap", "Below the gap", "below gap", below, "spectral"),
        ("thermalisation", "Heat above the gap", "heat", heat, "spectral"),
        ("limit_voltage", "Voltage of the limit", "voltage", voltage, "voltage"),
        ("limit_fill", "Fill factor of the limit", "fill", fill, "fill-factor"),
        ("detailed_balance", "Detailed-balance limit", "limit", rest, "limit"),
    ]
    return tuple(
        Segment(key, label, short, share, f"{share:.1f} %".replace("-", "−"), role)
        for key, label, short, share, role in rows
    )


def staircase(
    limit: float, losses: list[tuple[str, float, str, Role]], assumed: tuple[int, ...] = ()
) -> tuple[Step, ...]:
    """Rows from a limit through losses (name, amount, remark, role) to the cell."""
    rows = [Step("detailed_balance", "Detailed-balance limit", 0, limit, percent(limit), "", "limit", total=True)]
    level = limit
    for index, (name, amount, detail, role) in enumerate(losses):
        text = percent(-amount) if amount > 0 else "+" + percent(-amount)
        if amount == 0:
            text = percent(0.0)
        rows.append(Step(f"line{index}", name, level, level - amount, text, detail, role, assumed=index in assumed))
        level -= amount
    rows.append(Step("cell", "Measured cell", 0, level, percent(level), "", "cell", total=True))
    return tuple(rows)


CAPTION = (
    "Cell A-17: Voc 738.0 mV, Jsc 42.65 mA cm⁻², FF 84.90 %, gap 1.120 eV, 25.0 °C, area 79.0 cm².",
    "Step absorber, front emission, log-mean attribution. ERE by reciprocity; invented numbers.",
)

SILICON = WaterfallSpec(
    title="Cell A-17: where the light goes",
    strip_title="Sunlight, AM1.5G, 100.0 mW cm⁻²",
    steps_title="From the limit to the cell, % of the sunlight",
    segments=segments(),
    steps=staircase(
        33.48,
        [
            ("Uncollected current", 0.81, "−1.16 mA cm⁻²", "spectral"),
            ("Voltage at lower current", 0.04, "−0.7 mV", "voltage"),
            ("Absorption edge", 0.0, "0 mV", "voltage"),
            ("Non-radiative recombination", 5.18, "−139 mV", "non-radiative"),
            ("Fill factor at this voltage", 1.22, "−1.6 %", "fill-factor"),
            ("Remaining fill factor", -0.47, "+0.5 %", "fill-factor"),
        ],
        assumed=(2,),
    ),
    axis_label="Share of the incident power [%]",
    axis_range=(20.0, 34.0),
    legend=FAMILIES,
    caption=CAPTION,
)

PEROVSKITE = replace(
    SILICON,
    title="Cell P-03 (invented): 17.9 % against 30.6 %",
    segments=segments(37.2, 17.1, 11.0, 4.12),
    steps=staircase(
        30.58,
        [
            ("Uncollected current", 2.35, "−1.91 mA cm⁻²", "spectral"),
            ("Current mismatch, EQE against J–V", 0.51, "−0.44 mA cm⁻²", "spectral"),
            ("Voltage at lower current", 0.07, "−2.1 mV", "voltage"),
            ("Absorption edge", 0.33, "−11 mV", "voltage"),
            ("Non-radiative recombination", 5.22, "−174 mV", "non-radiative"),
            ("Fill factor at this voltage", 0.44, "−1.1 %", "fill-factor"),
            ("Ideality factor", 1.21, "−3.0 %", "fill-factor"),
            ("Series resistance", 1.9, "−4.8 %", "fill-factor"),
            ("Shunt resistance", 0.65, "−1.6 %", "fill-factor"),
        ],
    ),
    axis_range=(0.0, 32.0),
)

SIXTEEN = replace(
    PEROVSKITE,
    title="Every line the ledger can have, and then some",
    steps=staircase(
        30.58,
        [
            ("Reflection", 0.8, "−0.7 mA cm⁻²", "spectral"),
            ("Uncollected current", 1.35, "−1.1 mA cm⁻²", "spectral"),
            ("Current below the gap", -0.22, "+0.2 mA cm⁻²", "spectral"),
            ("Current mismatch", 0.51, "−0.4 mA cm⁻²", "spectral"),
            ("Voltage at lower current", 0.07, "−2 mV", "voltage"),
            ("Absorption edge", 0.33, "−11 mV", "voltage"),
            ("Non-radiative: bulk", 2.11, "−70 mV", "non-radiative"),
            ("Non-radiative: C₆₀ interface", 1.7, "−57 mV", "non-radiative"),
            ("Non-radiative: hole contact", 1.41, "−47 mV", "non-radiative"),
            ("Voltage residual", -0.05, "+2 mV", "voltage"),
            ("Fill factor at this voltage", 0.44, "−1.1 %", "fill-factor"),
            ("Ideality factor", 1.21, "−3.0 %", "fill-factor"),
            ("Series resistance", 1.9, "−4.8 %", "fill-factor"),
            ("Shunt resistance", 0.65, "−1.6 %", "fill-factor"),
        ],
        assumed=(5, 9),
    ),
)

LONG_NAMES = replace(
    SILICON,
    title="A title so long that no slide in the world would ever hold it on one single line, whatever the type size",
    strip_title="Sunlight of a spectrum with a rather long name, measured on the roof, 97.3 mW cm⁻², as tabulated",
    steps_title="From the detailed-balance limit of this bandgap down to the measured cell, in % of the incident power",
    segments=tuple(
        replace(part, label=f"{part.label} as reckoned by the long convention", short=f"{part.short} (long)")
        for part in segments()
    ),
    steps=tuple(
        replace(
            step,
            label=f"{step.label} with remarks about how it came about",
            detail_text=step.detail_text and f"{step.detail_text} of 878.3",
        )
        for step in SILICON.steps
    ),
    axis_label="Share of the incident power that is still there after each step of the ledger [%]",
    legend=tuple((role, f"{name} losses of the whole cell") for role, name in FAMILIES),
    caption=tuple(line * 2 for line in CAPTION),
)

ZERO = replace(
    SILICON,
    title="A cell at its limit",
    steps=staircase(
        33.48,
        [
            ("Current", 0.0, "0.00 mA cm⁻²", "spectral"),
            ("Voltage", 0.0, "0 mV", "voltage"),
            ("Non-radiative recombination", 0.0, "0 mV", "non-radiative"),
            ("Fill factor", 0.0, "0.0 %", "fill-factor"),
        ],
        assumed=(1,),
    ),
    axis_range=(0.0, 35.0),
)

GAINS = replace(
    SILICON,
    title="Gains and losses",
    steps=staircase(
        20.0,
        [
            ("Current", -4.0, "+5.1 mA cm⁻²", "spectral"),
            ("Voltage", -6.0, "+210 mV", "voltage"),
            ("Non-radiative recombination", 12.0, "−412 mV", "non-radiative"),
            ("Fill factor", -1.5, "+6.0 %", "fill-factor"),
        ],
        assumed=(1,),
    ),
    axis_range=(0.0, 32.0),
)

POOR = replace(
    PEROVSKITE,
    title="A poor cell: 2 % against 30 %",
    steps=staircase(
        30.0,
        [
            ("Current", 1.0, "−1.2 mA cm⁻²", "spectral"),
            ("Non-radiative recombination", 26.2, "−905 mV, of which 12 mV at contacts", "non-radiative"),
            ("Fill factor", 0.8, "−41.0 %", "fill-factor"),
        ],
    ),
    axis_range=(0.0, 30.0),
)

MARKUP = replace(
    GAINS,
    title='<b>A & B</b> "quoted" η λ Δ Ω 10⁻¹² → ±3 °C',
    steps=tuple(replace(step, label=f"{step.label} <η & Ω>") for step in GAINS.steps),
    strip_title="λ < 1107 nm & λ > 280 nm",
)

STALE = replace(PEROVSKITE, stale="Shows the last valid input: the fill factor must lie between 25 and 100 %.")

DIM = replace(
    PEROVSKITE,
    title="Indoor light, wide gap",
    segments=segments(0.0, 21.4, 24.9, 3.3),
    steps=staircase(
        50.4,
        [
            ("Current", 3.1, "−9 µA cm⁻²", "spectral"),
            ("Non-radiative recombination", 14.0, "−260 mV", "non-radiative"),
            ("Fill factor", 4.0, "−8.1 %", "fill-factor"),
            ("Shunt resistance", 2.0, "−4 %", "fill-factor"),
        ],
    ),
    axis_range=(0.0, 55.0),
)

WATERFALLS = {
    "silicon": SILICON,
    "perovskite": PEROVSKITE,
    "sixteen": SIXTEEN,
    "long": LONG_NAMES,
    "zero": ZERO,
    "gains": GAINS,
    "poor": POOR,
    "markup": MARKUP,
    "stale": STALE,
    "dim": DIM,
}


def _diode(short: float, open_: float, ideality: float) -> tuple[np.ndarray, np.ndarray]:
    voltage = np.linspace(-0.05, open_ + 0.02, 200)
    thermal = ideality * 0.02569
    return voltage, short * (1 - np.expm1(voltage / thermal) / np.expm1(open_ / thermal))


_limit, _cell = _diode(43.81, 0.8783, 1.0), _diode(42.65, 0.738, 1.1)

JV = PlotSpec(
    title="Current against voltage",
    x_label="Voltage [V]",
    y_label="Current density [mA cm⁻²]",
    x_range=(-0.05, 0.95),
    y_range=(0.0, 50.0),
    series=(
        Series("limit", "Limit", *_limit, "limit", "dashed"),
        Series("cell", "Cell A-17", *_cell, "cell"),
    ),
    marks=(
        Mark("limit_mpp", "33.48 %", 0.7917, 42.3, "limit", "diamond", filled=False),
        Mark("cell_mpp", "26.70 %", 0.658, 40.6, "cell", "circle"),
    ),
    caption=CAPTION,
)

_gaps = np.linspace(0.5, 3.0, 251)
_limit_curve = 33.7 * np.exp(-(((_gaps - 1.34) / 0.75) ** 2)) + 1.5 * np.sin(9 * _gaps) * np.exp(-_gaps)

GAP = PlotSpec(
    title="Efficiency against gap",
    x_label="Gap [eV]",
    y_label="Efficiency [%]",
    x_range=(0.5, 3.0),
    y_range=(0.0, 40.0),
    series=(Series("limit", "Detailed-balance limit, AM1.5G", _gaps, _limit_curve, "limit"),),
    marks=(
        Mark("limit", "Limit at this gap 33.5 %", 1.12, 31.9, "limit", "diamond", filled=False),
        Mark("cell", "Cell A-17 26.7 %", 1.12, 26.7, "cell"),
    ),
    caption=CAPTION[:1],
)

_nm = np.linspace(300, 1200, 300)
_eqe = np.where(
    (_nm > 700) & (_nm < 720), np.nan, 0.95 / (1 + np.exp((_nm - 1100) / 25)) * (1 - np.exp(-(_nm - 290) / 40))
)

MANY = PlotSpec(
    title="Many curves that run beyond the frame",
    x_label="Wavelength λ [nm]",
    y_label="Quantum efficiency",
    x_range=(300.0, 1200.0),
    y_range=(-0.1, 1.0),
    series=tuple(
        Series(f"s{i}", f"Cell {i}", _nm, _eqe * (1.25 - 0.17 * i) + (0.02 if i == 5 else 0), role, dash)
        for i, (role, dash) in enumerate(
            [
                ("spectral", "solid"),
                ("voltage", "dashed"),
                ("fill-factor", "dotted"),
                ("non-radiative", "solid"),
                ("cell", "dashed"),
                ("muted", "solid"),
            ]
        )
    ),
    marks=tuple(Mark(f"m{i}", f"λ{i}", 620.0 + 6 * i, 0.5 + 0.02 * i, "cell", "square") for i in range(4)),
    stale="Shows the last valid input.",
)

TINY_NUMBERS = replace(
    JV,
    title="Very small numbers",
    y_label="Dark current [mA cm⁻²]",
    y_range=(-2e-13, 8e-13),
    series=(Series("a", "", np.array([0.0, 0.5, 0.9]), np.array([-1e-13, 2e-13, 7e-13]), "cell", "dotted"),),
    marks=(),
    caption=(),
)

PLOTS = {"jv": JV, "gap": GAP, "many": MANY, "tiny": TINY_NUMBERS}
