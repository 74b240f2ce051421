"""Every reference value that the physics is held against, with where it comes from and how it is known.

Kinds: *published* (read in the source named), *from memory* (recalled, not read again: never the only thing that a
test rests on), *common practice* (a figure of the trade without one source), *recomputed* (worked out by brute force
or by hand, apart from `physics`; what `brute.py` beside this file does again on every run).
"""

from dataclasses import dataclass
from typing import Literal

Kind = Literal["published", "from memory", "common practice", "recomputed"]


@dataclass(frozen=True)
class Value:
    """A number, how it is known, and half of the last digit that is given for it (its rounding)."""

    value: float
    rounding: float
    kind: Kind
    source: str


@dataclass(frozen=True)
class LimitRow:
    """Limit of one gap: AM1.5G as tabulated, 298.15 K, one emitting face [eV, mA cm⁻², mA cm⁻², V, 1, %]."""

    gap: float
    jsc: float
    j0: float
    voc: float
    ff: float
    pce: float


@dataclass(frozen=True)
class CertifiedCell:
    """A certified cell [eV, V, mA cm⁻², %, % ±]; the gap is not part of the certificate."""

    title: str
    gap: float
    voc: float
    jsc: float
    ff: float
    pce: float
    pce_uncertainty: float
    kind: Kind


# --- Spectra ---------------------------------------------------------------------------------------------------------

G173_POINTS = 2002
_G173 = "ASTM G173-03(2020), doi:10.1520/G0173-03R20"
_TRAPEZOID = "trapezoid over the 2002 points of the G173 table"

#: Power of the whole table [W m⁻²].
POWER = {
    "am15g": Value(1000.37, 0.005, "published", _G173),
    "am15d": Value(900.14, 0.005, "from memory", f"{_G173}; recomputed by {_TRAPEZOID}"),
    "am0": Value(1347.93, 0.005, "from memory", f"{_G173}; recomputed by {_TRAPEZOID}"),
}

#: Photon current of the whole table [mA cm⁻²].
PHOTON_CURRENT = {
    "am15g": Value(68.983, 0.0005, "recomputed", _TRAPEZOID),
    "am15d": Value(63.892, 0.0005, "recomputed", _TRAPEZOID),
    "am0": Value(98.498, 0.0005, "recomputed", _TRAPEZOID),
}

#: Photon current of AM1.5G up to a wavelength [nm -> mA cm⁻²].
PARTIAL_CURRENT = {
    400.0: Value(1.3529, 0.00005, "recomputed", "G173 global, integrated to this wavelength"),
    900.0: Value(33.741, 0.0005, "recomputed", "G173 global, integrated to this wavelength"),
    1000.0: Value(38.061, 0.0005, "recomputed", "G173 global, integrated to this wavelength"),
    1100.0: Value(43.518, 0.0005, "recomputed", "G173 global, integrated to this wavelength"),
    1107.0: Value(43.811, 0.0005, "recomputed", "G173 global, integrated to this wavelength"),
    1200.0: Value(46.456, 0.0005, "recomputed", "G173 global, integrated to this wavelength"),
}

_60904_9 = "IEC 60904-9, share of the power between 400 and 1100 nm; recomputed from G173 to the digit shown"

#: Share of a band [nm, nm -> %].
BAND_SHARE = {
    (400.0, 500.0): Value(18.4, 0.05, "from memory", _60904_9),
    (500.0, 600.0): Value(19.9, 0.05, "from memory", _60904_9),
    (600.0, 700.0): Value(18.4, 0.05, "from memory", _60904_9),
    (700.0, 800.0): Value(14.9, 0.05, "from memory", _60904_9),
    (800.0, 900.0): Value(12.5, 0.05, "from memory", _60904_9),
    (900.0, 1100.0): Value(15.9, 0.05, "from memory", _60904_9),
}

# --- Limits ----------------------------------------------------------------------------------------------------------

#: Recomputed by adaptive quadrature and root finding, to the digits shown.
LIMIT_TABLE = (
    LimitRow(0.70, 60.703, 3.155e-07, 0.4901, 0.8014, 23.83),
    LimitRow(1.00, 48.220, 5.348e-12, 0.7664, 0.8566, 31.64),
    LimitRow(1.12, 43.811, 6.250e-14, 0.8783, 0.8705, 33.48),
    LimitRow(1.34, 35.032, 1.697e-17, 1.0835, 0.8897, 33.76),
    LimitRow(1.60, 25.467, 9.683e-22, 1.3264, 0.9057, 30.58),
    LimitRow(2.00, 14.586, 2.604e-28, 1.7007, 0.9225, 22.88),
)

_RUEHLE = "S. Rühle, Solar Energy 130 (2016) 139, doi:10.1016/j.solener.2016.02.015"
_SQ = "W. Shockley and H. J. Queisser, J. Appl. Phys. 32 (1961) 510, doi:10.1063/1.1736034"
_QUAD = "adaptive quadrature and root finding, AM1.5G as tabulated, 298.15 K"

#: Highest efficiency [%] and its gap [eV] by the number of emitting faces.
MAXIMUM = {
    1: (Value(33.77, 0.005, "recomputed", _QUAD), Value(1.336, 0.0005, "recomputed", _QUAD)),
    2: (Value(33.16, 0.005, "published", f"{_RUEHLE}; recomputed"), Value(1.337, 0.0005, "recomputed", _QUAD)),
}
ONE_FACE_ROUNDED = Value(33.7, 0.05, "published", f"{_RUEHLE}, at 1.34 eV")

TRADE_LIMIT = Value(33.1, 0.05, "common practice", "“33.1 % at 1.34 eV, AM1.5”")
TRADE_LIMIT_RECOMPUTED = Value(33.15, 0.005, "recomputed", f"{_QUAD}, both faces, 1.34 eV")
TRADE_ULTIMATE = Value(48.0, 0.5, "common practice", "“ultimate efficiency about 48 % at 1.2 eV, AM1.5”")
TRADE_ULTIMATE_RECOMPUTED = Value(47.96, 0.005, "recomputed", "J·Eg/(q P) at 1.2 eV, AM1.5G as tabulated")
ULTIMATE_MAXIMUM = Value(49.05, 0.005, "recomputed", "largest J·Eg/(q P) of AM1.5G, at 1.121 eV")
TRADE_FILL_FACTOR = Value(0.87, 0.01, "common practice", "“best fill factor about 0.87 at 1.2 eV”")
TRADE_FILL_FACTOR_RECOMPUTED = {
    1: Value(0.878, 0.0005, "recomputed", _QUAD),
    2: Value(0.877, 0.0005, "recomputed", _QUAD),
}
FACES_VOLTAGE = Value(17.8, 0.05, "recomputed", "Vt ln 2 at 298.15 K [mV]")
HOTTER_CELL = Value(0.08, 0.005, "recomputed", "efficiency lost between 298.15 and 300 K at 1.34 eV [% absolute]")
DIVISOR = Value(0.037, 0.0005, "recomputed", "dividing by 1000 in place of 1000.3707 W m⁻² [% relative]")

PEROVSKITE_VOC_LIMIT = Value(1.297, 0.0005, "published", "Voc limit of a 1.57 eV gap, 300 K, one-face convention [V]")
PEROVSKITE_VOC_LIMIT_RECOMPUTED = Value(1.2965, 0.00005, "recomputed", "the same, AM1.5G as tabulated")

#: What +10 meV of gap changes. The voltage is nearly the same for all gaps; the current follows the bands of the air.
GAP_STEP_VOLTAGE = Value(9.3, 0.05, "recomputed", "Voc_lim, mean from 1.12 to 1.60 eV [mV]")
GAP_STEP_VOLTAGE_SPAN = (
    Value(9.26, 0.005, "recomputed", "smallest such step of Voc_lim between 1.12 and 1.61 eV"),
    Value(9.54, 0.005, "recomputed", "largest such step"),
)
GAP_STEP_CURRENT = (-0.41, -0.36)  # recomputed: mean of Jsc_lim from 1.12 to 1.60 eV lies here [mA cm⁻²]
GAP_STEP_CURRENT_SPAN = (
    Value(-0.494, 0.0005, "recomputed", "steepest 10 meV step of Jsc_lim between 1.12 and 1.61 eV, 1 meV apart"),
    Value(-0.115, 0.0005, "recomputed", "flattest such step"),
)

# --- Black-body suns -------------------------------------------------------------------------------------------------

SQ_EFFICIENCY = Value(30.0, 0.5, "published", f"{_SQ}: 30 % at 1.1 eV, 6000 K sun, 300 K cell")
SQ_ULTIMATE = Value(44.0, 0.5, "published", _SQ)
SQ_ULTIMATE_RECOMPUTED = (
    Value(43.88, 0.005, "recomputed", "largest x ∫ₓ t²/(eᵗ−1) dt / (π⁴/15) [%]"),
    Value(2.166, 0.0005, "recomputed", "x = Eg/kTs of that maximum"),
)
SQ_DILUTION = Value(2.18e-5, 0.005e-5, "from memory", _SQ)
FULL_CONCENTRATION = 46239.0  # recomputed: (astronomical unit / solar radius)², IAU 2012/2015 nominal values
#: Generalised Planck form, 6000 K sun at full concentration, 300 K cell; published elsewhere as "41 %".
FULL_EFFICIENCY = Value(
    40.7, 0.05, "from memory", "A. De Vos; G. L. Araújo and A. Martí, Sol. Energy Mater. Sol. Cells 33 (1994) 213"
)
FULL_EFFICIENCY_RECOMPUTED = (
    Value(40.74, 0.005, "recomputed", "quadrature of the generalised Planck form [%]"),
    Value(1.109, 0.0005, "recomputed", "gap of that maximum [eV]"),
)
DECADE = Value(59.16, 0.005, "recomputed", "Vt ln 10 at 298.15 K [mV]")

# --- Diode -----------------------------------------------------------------------------------------------------------

_GREEN_81 = "M. A. Green, Solid-State Electron. 24 (1981) 788, doi:10.1016/0038-1101(81)90062-9"
_GREEN_82 = "M. A. Green, Solar Cells 7 (1982) 337, doi:10.1016/0379-6787(82)90057-6"

#: Relative error of FF0 = [v − ln(v + 0.72)]/(v + 1).
GREEN_AT_TEN = Value(2.7e-4, 0.05e-4, "published", _GREEN_81)
GREEN_ABOVE = Value(1.0e-4, 0.2e-4, "published", f"{_GREEN_81}: “about 1e-4” further up")
#: Range of use of FFs = FF0 (1 − 1.1 r) + r²/5.4 and FFsh = FF0 [1 − (v + 0.7)/v · FF0/r_sh]; v > 10 for all three.
GREEN_SERIES_RANGE = Value(0.4, 0.0, "published", _GREEN_82)
GREEN_SHUNT_RANGE = Value(2.5, 0.0, "published", f"{_GREEN_82}, with the misprint of the range put right")
#: Largest absolute error of the two over v = 10 to 60.
GREEN_SERIES_ERROR = Value(3.9e-3, 0.05e-3, "recomputed", "against the exact curve, r from 0 to 0.4")
GREEN_SHUNT_ERROR = Value(1.2e-3, 0.05e-3, "recomputed", "against the exact curve, r_sh from 2.5 to 100")

#: Exact fill factor of the one-diode curve by (v, r, r_sh), r and r_sh in units of Voc/Jsc; recomputed.
EXACT_FILL_FACTOR = {
    (10.0, 0.0, float("inf")): Value(0.693633, 5e-7, "recomputed", "one-diode curve, brute force"),
    (20.0, 0.0, float("inf")): Value(0.807956, 5e-7, "recomputed", "one-diode curve, brute force"),
    (30.0, 0.0, float("inf")): Value(0.857181, 5e-7, "recomputed", "one-diode curve, brute force"),
    (40.0, 0.0, float("inf")): Value(0.885141, 5e-7, "recomputed", "one-diode curve, brute force"),
    (20.0, 0.1, float("inf")): Value(0.71987, 5e-6, "recomputed", "one-diode curve, brute force"),
    (30.0, 0.0, 10.0): Value(0.78142, 5e-6, "recomputed", "one-diode curve, brute force"),
    (30.0, 0.05, 20.0): Value(0.77880, 5e-6, "recomputed", "one-diode curve, brute force"),
}

# --- Voltage and luminescence ----------------------------------------------------------------------------------------

_RAU = "U. Rau, Phys. Rev. B 76 (2007) 085303, doi:10.1103/PhysRevB.76.085303: ΔV = −Vt ln ERE, 25 °C"

#: Non-radiative voltage by ERE [mV].
ERE_VOLTAGE = {
    0.225: Value(38.3, 0.05, "recomputed", _RAU),
    0.05: Value(77.0, 0.05, "recomputed", _RAU),
    0.01: Value(118.3, 0.05, "recomputed", _RAU),
    0.0057: Value(132.8, 0.05, "recomputed", _RAU),
}
#: Halide perovskite of 2019 (published): Voc "above" [V], external luminescence "about", gap of the step [eV].
PEROVSKITE_2019 = (1.26, 0.05, 1.60)
PEROVSKITE_2019_CLOSES = Value(11.0, 0.5, "recomputed", "1.26 V + 77 mV − 1.326 V [mV]")
#: GaAs from memory: Voc [V], ERE, and the radiative voltage that they imply, recomputed [V].
GAAS_ERE = (
    (1.107, 0.225, Value(1.145, 0.0005, "recomputed", "Voc − Vt ln ERE")),
    (1.030, 0.0126, Value(1.142, 0.0005, "recomputed", "Voc − Vt ln ERE")),
)

# --- Cells -----------------------------------------------------------------------------------------------------------

#: Solar Cell Efficiency Tables (M. A. Green et al., Prog. Photovolt.); gaps of Si, GaAs and InP from memory.
CERTIFIED = (
    CertifiedCell("crystalline Si, rear contacts", 1.12, 0.738, 42.65, 84.9, 26.7, 0.5, "published"),
    CertifiedCell("Si, large area", 1.12, 0.7132, 41.47, 82.5, 24.4, 0.3, "published"),
    CertifiedCell("thin transferred Si", 1.12, 0.687, 38.50, 80.3, 21.2, 0.4, "published"),
    CertifiedCell("GaAs thin film", 1.424, 1.1272, 29.78, 86.7, 29.1, 0.6, "from memory"),
    CertifiedCell("InP", 1.344, 0.939, 31.15, 82.6, 24.2, 0.5, "from memory"),
)
_LEDGER = "log-mean ledger of the first cell against that limit, from its figures as rounded here [mW cm⁻²]"
FIRST_CELL_LIMIT = (
    Value(43.8108, 5e-5, "recomputed", "Jsc of a 1.12 eV step, AM1.5G as tabulated [mA cm⁻²]"),
    Value(0.878263, 5e-7, "recomputed", "Voc of the step [V]"),
    Value(0.870533, 5e-7, "recomputed", "fill factor of the step"),
)
FIRST_CELL_LEDGER = {
    "current": Value(0.80511, 5e-6, "recomputed", _LEDGER),
    "voltage": Value(5.21693, 5e-6, "recomputed", _LEDGER),
    "fill": Value(0.75094, 5e-6, "recomputed", _LEDGER),
    "sum": Value(6.77298, 5e-6, "recomputed", _LEDGER),
}
#: Auger-limited silicon: Voc [V], Jsc [mA cm⁻²], FF (from memory) of the 29.43 % (published) of A. Richter, M. Hermle
#: and S. W. Glunz, IEEE J. Photovolt. 3 (2013) 1184, doi:10.1109/JPHOTOV.2013.2270351.
AUGER_LIMITED_SILICON = (0.7613, 43.31, 0.8926, Value(29.43, 0.005, "published", "Richter, Hermle and Glunz 2013"))

# --- Attribution -----------------------------------------------------------------------------------------------------

#: Worked vector of an open package for index decomposition: two products of three factors, before and after.
LMDI_BEFORE = ((1.0, 10.0, 2.0), (4.0, 5.0, 3.0))
LMDI_AFTER = ((4.0, 5.0, 3.0), (5.0, 6.0, 4.0))
LMDI_EFFECTS = (
    Value(69.79006598, 5e-9, "published", "additive LMDI-I, B. W. Ang 2005, doi:10.1016/j.enpol.2003.10.010"),
    Value(-9.455125793, 5e-10, "published", "as above"),
    Value(39.66505981, 5e-9, "published", "as above"),
)
#: (40, 1, 0.9) -> (36, 0.8, 0.75), by hand: L(36, 21.6) ln(x_T/x_0).
LOG_MEAN_EXAMPLE = (
    Value(2.97008, 5e-6, "recomputed", "log-mean, current"),
    Value(6.29034, 5e-6, "recomputed", "log-mean, voltage"),
    Value(5.13958, 5e-6, "recomputed", "log-mean, fill factor"),
)
LADDER_EXAMPLE = (
    Value(3.6, 0.0, "recomputed", "4 · 1.0 · 0.9"),
    Value(6.48, 0.0, "recomputed", "36 · 0.2 · 0.9"),
    Value(4.32, 0.0, "recomputed", "36 · 0.8 · 0.15"),
)
