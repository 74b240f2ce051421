"""The number reader and writer: what is accepted, what is refused and in which words, and round trips."""

import locale
import math
import re
from collections.abc import Mapping
from decimal import Decimal
from fractions import Fraction

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from app.files.numbers import NumberError, read_number, write_exact, write_number

CURRENT = {"mA/cm²": 1.0, "A/m²": 0.1}
VOLTAGE = {"V": 1.0, "mV": 1e-3, "µV": 1e-6}
SHARE = {"%": 1.0}
RESISTANCE = {"Ω cm²": 1.0}

ACCEPTED_PLAIN = [
    ("0", 0.0),
    ("7", 7.0),
    ("007", 7.0),
    ("0.1", 0.1),
    ("0,1", 0.1),
    ("1.5", 1.5),
    ("1,5", 1.5),
    ("24.53", 24.53),
    ("24,53", 24.53),
    (".5", 0.5),
    (",5", 0.5),
    ("5.", 5.0),
    ("5,", 5.0),
    ("+5", 5.0),
    ("  5\t", 5.0),
    ("\u00a05\u202f", 5.0),
    # Minus signs
    ("-1.5", -1.5),
    ("−1.5", -1.5),
    ("−1,5", -1.5),
    ("\u20101.5", -1.5),
    ("\u20111.5", -1.5),
    ("\u20121.5", -1.5),
    ("–1.5", -1.5),
    ("\ufe631.5", -1.5),
    ("\uff0d1.5", -1.5),
    ("−,5", -0.5),
    # Groups of three
    ("1 234", 1234.0),
    ("1\u00a0234", 1234.0),
    ("1\u2009234", 1234.0),
    ("1\u202f234", 1234.0),
    ("1\u2007234", 1234.0),
    ("1'234", 1234.0),
    ("1’234", 1234.0),
    ("12 345 678", 12345678.0),
    ("123 456,75", 123456.75),
    ("1 234.5", 1234.5),
    ("1'234'567.5", 1234567.5),
    ("1'234,567", 1234.567),
    ("1 234,567", 1234.567),
    ("1,234.5", 1234.5),
    ("1.234,5", 1234.5),
    ("1,234.567", 1234.567),
    ("1.234,567", 1234.567),
    ("1,234,567", 1234567.0),
    ("1.234.567", 1234567.0),
    ("1,234,567.89", 1234567.89),
    ("−1.234.567,89", -1234567.89),
    # One mark and three digits: a dot is the decimal mark, and so is a comma where no group could stand
    # before it
    ("1.234", 1.234),
    ("123.456", 123.456),
    ("0,123", 0.123),
    ("00,123", 0.123),
    ("1234,567", 1234.567),
    ("1,2345", 1.2345),
    (",123", 0.123),
    # Exponents
    ("1e-3", 0.001),
    ("1E3", 1000.0),
    ("1e+3", 1000.0),
    ("5.e3", 5000.0),
    ("1,5e−3", 0.0015),
    ("1 234e2", 123400.0),
    ("1.5×10^3", 1500.0),
    ("1.5 × 10^-3", 0.0015),
    ("1.5·10^−3", 0.0015),
    ("1.5⋅10^+3", 1500.0),
    ("1.5*10^3", 1500.0),
    ("1.5x10^3", 1500.0),
    ("1,5×10³", 1500.0),
    ("1.5\u202f×\u202f10⁻³", 0.0015),
    ("3.155×10⁻⁷", 3.155e-7),
    ("2·10⁺¹²", 2e12),
    ("10⁻³", 0.001),
    ("10^3", 1000.0),
    ("−10⁴", -10000.0),
    # The edges of what a float holds
    ("1.7976931348623157e308", 1.7976931348623157e308),
    ("5e-324", 5e-324),
    ("0e99999", 0.0),
    ("0.1000000000000000055511151231257827", 0.1),
    ("9007199254740993", 9007199254740992.0),
]

ACCEPTED_WITH_UNIT = [
    ("1.1 V", VOLTAGE, 1.1),
    ("1,1V", VOLTAGE, 1.1),
    ("1100 mV", VOLTAGE, 1.1),
    ("35.3 mV", VOLTAGE, 0.0353),
    ("1'100\u202fmV", VOLTAGE, 1.1),
    ("\u2212738\u00a0mV", VOLTAGE, -0.738),
    ("5 µV", VOLTAGE, 5e-6),
    ("5 μV", VOLTAGE, 5e-6),
    ("1e3mV", VOLTAGE, 1.0),
    ("1.5×10⁻³V", VOLTAGE, 0.0015),
    ("10⁻³ V", VOLTAGE, 0.001),
    ("1.234", VOLTAGE, 1.234),
    ("38.1 mA/cm²", CURRENT, 38.1),
    ("38.1 mA/cm2", CURRENT, 38.1),
    ("38.1 mA/cm^2", CURRENT, 38.1),
    ("38.1 mA cm⁻²", CURRENT, 38.1),
    ("38.1 mA·cm⁻²", CURRENT, 38.1),
    ("38.1 mA cm^-2", CURRENT, 38.1),
    ("38,1 mA cm−2", CURRENT, 38.1),
    ("381 A m⁻²", CURRENT, 38.1),
    ("84.9%", SHARE, 84.9),
    ("84,9 %", SHARE, 84.9),
    ("1.2 \u2126 cm2", RESISTANCE, 1.2),
    ("1.2 Ω·cm²", RESISTANCE, 1.2),
    ("5 /cm²", {"cm⁻²": 1.0}, 5.0),
]

PLAUSIBLE = [
    ("1,234", (0.1, 3.0), 1.234),
    ("1,234", (100.0, 3000.0), 1234.0),
    ("1,234", (1.234, 3.0), 1.234),
    ("−1,234", (-5.0, 5.0), -1.234),
    ("999,000", (0.0, 1000.0), 999.0),
    ("1,234 mV", (0.1, 3.0), 1.234),
    ("1,234e-3", (0.1, 3.0), 1.234),
    ("1.234", (100.0, 3000.0), 1.234),
    ("1 234", (0.1, 3.0), 1234.0),
    ("1.5", (100.0, 200.0), 1.5),
]

MANY = "reads as more than one number: write one number."
SPACED = "reads as more than one number: write one, without spaces in it."
GROUPS = (
    "does not have its digits in groups of three: write it with one decimal point and nothing between the other digits."
)
SIGN = "has a sign that cannot be read: write one - just before the digits."
EXPONENT = "has an exponent that cannot be read: write it like 1.5e-3."
NO_NUMBER = "is not a number: write a number such as 1.5."
NOT_FINITE = "is not a finite number: write a number such as 1.5."
DIGITS = "has digits other than 0 to 9: write it with the digits 0 to 9."
LARGE = "is too large to hold: write a number below 1.7e308."
SMALL = "is too small to tell from zero: write 0 or a number above 5e-324."
BLANK = "Nothing is written here: write a number such as 1.5."

REFUSED_PLAIN = [
    ("", BLANK),
    (" \u00a0\t\n", BLANK),
    *[(text, f"“{text}” {NO_NUMBER}") for text in ("abc", "-", "−", "+", ".", ",", "-.", "e5", "<5", "~5", "(5)")],
    *[(text, f"“{text}” {NO_NUMBER}") for text in ("—", "$5", "information", "_1", "^3", "×10^3")],
    *[(text, f"“{text}” {NOT_FINITE}") for text in ("nan", "NaN", "-nan", "inf", "-INF", "Infinity", "∞", "−∞")],
    *[(text, f"“{text}” {DIGITS}") for text in ("١٢", "１２", "1２", "१", "1.५")],
    *[(text, f"“{text}” {LARGE}") for text in ("1e999", "-1e309", "1.8e308", "9×10⁹⁹⁹", "1e99999999999999999999")],
    *[(text, f"“{text}” {SMALL}") for text in ("1e-999", "-2e-324", "0.1×10⁻³²⁴", "1e-99999999999999999999")],
    *[(text, f"“{text}” {SIGN}") for text in ("- 5", "− 5", "--5", "+-5", "-−5", "±5", "—5")],
    *[(text, f"“{text}” {EXPONENT}") for text in ("5e", "5e-", "5 e-3", "5e 3", "1.5×10", "1.5×10^", "1.5 x 10 3")],
    *[(text, f"“{text}” {SPACED}") for text in ("1 2", "12 34", "1 2345", "1234 567", "0 123", "1.5 2.5")],
    *[
        (text, f"“{text}” {SPACED}")
        for text in ("1.234 567", "1,234 567", "1 234,", "1 234'567", "1.5 10⁻³", "1.5 10^3")
    ],
    *[(text, f"“{text}” {MANY}") for text in ("1, 2", "1;2", "3-5", "3–5", "1/2", "5±1", "1.5e3.5", "1e5,5")],
    *[(text, f"“{text}” {MANY}") for text in ("1  234", "1,  234", "5(1)", "1_000", "10^3^2", "1:2", "2⁻3")],
    *[(text, f"“{text}” {GROUPS}") for text in ("1,23.4", "1.2.3", "12,34,567", "1,234,56", "1.234.567.8")],
    *[(text, f"“{text}” {GROUPS}") for text in ("1,234.567,89", "1,234.567.890", "1.234,", "1,234.", "0,123.4")],
    *[(text, f"“{text}” {GROUPS}") for text in ("1'23", "1,234'567", ".5,5")],
    ("1\n234", "“1\\n234” " + MANY),
    ("1\t234", "“1\\t234” " + MANY),
    ("1\u00a02", "“1 2” " + SPACED),
    ("0x1F", "“0x1F” is a hexadecimal number: write it as a decimal number such as 1.5."),
    ("-0XA", "“-0XA” is a hexadecimal number: write it as a decimal number such as 1.5."),
    ("\ufeff5", "“\\ufeff5” " + NO_NUMBER),
    ("5\u200b", "“5\\u200b” has “\\u200b” after the number: write the number alone."),
    ("5\x00", "“5\\x00” has “\\x00” after the number: write the number alone."),
    ("5)", "“5)” has “)” after the number: write the number alone."),
    ("1''234", "“1''234” " + MANY),
    ("1..5", "“1..5” " + MANY),
    ("1,.5", "“1,.5” " + MANY),
    ("1.#INF", "“1.#INF” has “#INF” after the number: write the number alone."),
    ("5 V", "“5 V” has the unit “V”, not known here: write the number alone."),
    ("5%", "“5%” has the unit “%”, not known here: write the number alone."),
    ("1d3", "“1d3” has the unit “d3”, not known here: write the number alone."),
    ("1,234", "“1,234” can mean two numbers: write “1.234” or “1234”."),
    ("−12,345", "“−12,345” can mean two numbers: write “-12.345” or “-12345”."),
    ("1,234×10³", "“1,234×10³” can mean two numbers: write “1.234×10³” or “1234×10³”."),
    ("9" * 400, "“" + "9" * 39 + "…” " + LARGE),
    ("a" * 100_000, "“" + "a" * 39 + "…” " + NO_NUMBER),
]

REFUSED_WITH_UNIT = [
    (
        "5 kV",
        VOLTAGE,
        "“5 kV” has the unit “kV”, not known here: write the number alone or with V, mV or µV.",
    ),
    (
        "5 MV",
        VOLTAGE,
        "“5 MV” has the unit “MV”, not known here: write the number alone or with V, mV or µV.",
    ),
    (
        "5 V/",
        VOLTAGE,
        "“5 V/” has the unit “V/”, not known here: write the number alone or with V, mV or µV.",
    ),
    (
        "5 V mV",
        VOLTAGE,
        "“5 V mV” has the unit “V mV”, not known here: write the number alone or with V, mV or µV.",
    ),
    (
        "5 mA",
        CURRENT,
        "“5 mA” has the unit “mA”, not known here: write the number alone or with mA/cm² or A/m².",
    ),
    ("5 V", SHARE, "“5 V” has the unit “V”, not known here: write the number alone or with %."),
    (
        "5 V.",
        VOLTAGE,
        "“5 V.” has the unit “V.”, not known here: write the number alone or with V, mV or µV.",
    ),
    ("5 ?", VOLTAGE, "“5 ?” has “?” after the number: write the number alone or with V, mV or µV."),
    ("V", VOLTAGE, f"“V” {NO_NUMBER}"),
    (
        "5 mA/cm² 3",
        CURRENT,
        "“5 mA/cm² 3” has the unit “mA/cm² 3”, not known here: write the number alone or with mA/cm² or A/m².",
    ),
    ("1,234 mV", VOLTAGE, "“1,234 mV” can mean two numbers: write “1.234 mV” or “1234 mV”."),
    ("1e-323 mV", VOLTAGE, f"“1e-323 mV” {SMALL}"),
    ("1e308 k", {"k": 1e3}, f"“1e308 k” {LARGE}"),
    ("5 1/cm²", {"cm⁻²": 1.0}, f"“5 1/cm²” {SPACED}"),
]


@pytest.mark.parametrize(("text", "expected"), ACCEPTED_PLAIN)
def test_a_clear_number_is_read_exactly(text: str, expected: float) -> None:
    assert read_number(text) == expected


@pytest.mark.parametrize(("text", "units", "expected"), ACCEPTED_WITH_UNIT)
def test_a_unit_brings_the_number_to_the_fields_unit(text: str, units: Mapping[str, float], expected: float) -> None:
    assert read_number(text, units) == expected


@pytest.mark.parametrize(("text", "plausible", "expected"), PLAUSIBLE)
def test_the_plausible_range_decides_only_what_is_ambiguous(
    text: str, plausible: tuple[float, float], expected: float
) -> None:
    assert read_number(text, VOLTAGE, plausible) == expected


@pytest.mark.parametrize(("text", "message"), REFUSED_PLAIN)
def test_anything_else_is_refused_in_one_sentence(text: str, message: str) -> None:
    with pytest.raises(NumberError) as caught:
        read_number(text)
    assert str(caught.value) == message


@pytest.mark.parametrize(("text", "units", "message"), REFUSED_WITH_UNIT)
def test_a_wrong_unit_is_refused_naming_the_right_ones(text: str, units: Mapping[str, float], message: str) -> None:
    with pytest.raises(NumberError) as caught:
        read_number(text, units)
    assert str(caught.value) == message


@pytest.mark.parametrize("plausible", [(0.0, 1e6), (2.0, 3.0)], ids=["both", "neither"])
def test_a_range_that_does_not_decide_leaves_the_refusal(plausible: tuple[float, float]) -> None:
    with pytest.raises(NumberError) as caught:
        read_number("1,234", VOLTAGE, plausible)
    assert str(caught.value) == "“1,234” can mean two numbers: write “1.234” or “1234”."


@pytest.mark.parametrize("text", ["1,234", "−12,345 mV", "1,234×10³ V", "1,234e−2"])
def test_both_readings_named_in_a_refusal_can_be_written(text: str) -> None:
    with pytest.raises(NumberError) as caught:
        read_number(text, VOLTAGE)
    first, second = (part.split("”")[0] for part in str(caught.value).split("“")[2:])
    assert read_number(second, VOLTAGE) == pytest.approx(1000 * read_number(first, VOLTAGE), rel=1e-15)


@pytest.mark.parametrize(
    ("text", "expected"),
    [("1,234", 1.234), ("1.234,5", 1234.5), ("1.5", 1.5), ("1234.567", 1234.567), ("0.123", 0.123), ("12", 12.0)],
)
def test_a_table_with_decimal_commas_is_read_by_them(text: str, expected: float) -> None:
    assert read_number(text, decimal_comma=True) == expected


def test_a_lone_dot_is_doubtful_in_a_table_with_decimal_commas() -> None:
    with pytest.raises(NumberError) as caught:
        read_number("1.234 mV", VOLTAGE, decimal_comma=True)
    assert str(caught.value) == "“1.234 mV” can mean two numbers: write “1,234 mV” or “1234 mV”."
    assert read_number("1.234 mV", VOLTAGE, (0.1, 3.0), decimal_comma=True) == 1.234


def test_minus_zero_keeps_its_sign() -> None:
    assert math.copysign(1.0, read_number("-0")) == -1.0


def test_the_locale_does_not_matter() -> None:
    before = locale.setlocale(locale.LC_ALL)
    wanted = [("1.234", 1.234), ("1,5", 1.5), ("1.234,5", 1234.5)]
    tried = []
    try:
        for name in ("C", "C.UTF-8", "de_DE.UTF-8", "fr_FR.UTF-8", "hi_IN.UTF-8"):
            try:
                locale.setlocale(locale.LC_ALL, name)
            except locale.Error:
                continue
            tried.append(name)
            assert [read_number(text) for text, _ in wanted] == [value for _, value in wanted]
            assert write_exact(1234.5) == "1234.5"
            assert write_number(-1234.5, 5) == "−1234.5"
    finally:
        locale.setlocale(locale.LC_ALL, before)
    assert tried


@given(st.floats(allow_nan=False, allow_infinity=False))
@example(-0.0)
@example(5e-324)
@example(1e22)
@example(123456789.0)
def test_an_exact_text_reads_back_as_the_same_float(value: float) -> None:
    for text in (write_exact(value), write_exact(value).replace(".", ",")):
        again = read_number(text, plausible=(value, value))
        assert again == value
        assert math.copysign(1.0, again) == math.copysign(1.0, value) or value == 0.0
    assert math.copysign(1.0, read_number(write_exact(value))) == math.copysign(1.0, value)


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_displayed_number_without_digits_is_exact(value: float) -> None:
    assert read_number(write_number(value)) == value
    assert read_number(write_number(value, minus="-")) == value


@given(st.floats(min_value=-1e300, max_value=1e300).filter(lambda value: abs(value) > 1e-300), st.integers(1, 17))
def test_a_displayed_number_is_right_to_its_digits(value: float, digits: int) -> None:
    shown = read_number(write_number(value, digits))
    assert shown == pytest.approx(value, rel=0.5000001 * 10.0 ** (1 - digits))


@given(st.decimals(allow_nan=False, allow_infinity=False, min_value=-(10**15), max_value=10**15, places=6))
def test_a_unit_factor_is_applied_with_one_rounding(number: Decimal) -> None:
    expected = float(Fraction(number) / 1000)
    assert read_number(f"{number} mV", VOLTAGE) == expected


@given(st.text(alphabet="0123456789.,-−+eE×10^ '\u202fmV%⁻³naifx_", max_size=14))
@example("0x10^3")
@example("0,000")
def test_any_text_is_read_finite_or_refused_in_a_sentence(text: str) -> None:
    try:
        value = read_number(text, {**VOLTAGE, **SHARE})
    except NumberError as refusal:
        sentence = str(refusal)
        assert sentence.endswith(".")
        assert "\n" not in sentence
    else:
        assert math.isfinite(value)
        # Every digit typed is accounted for: a zero result needs a text without other digits in its mantissa.
        assert value != 0.0 or not set("123456789") & set(re.split("[eE×x]", text)[0])


WRITTEN = [
    (0.0, {}, "0"),
    (-0.0, {}, "0"),
    (1.5, {}, "1.5"),
    (-1.5, {}, "−1.5"),
    (-1.5, {"minus": "-"}, "-1.5"),
    (3.155e-17, {}, "3.155×10⁻¹⁷"),
    (-3.155e-17, {"minus": "-"}, "-3.155e-17"),
    (1e22, {}, "1×10²²"),
    (0.0, {"digits": 3}, "0.00"),
    (298.15, {"digits": 2}, "298"),
    (35.0318, {"digits": 4}, "35.03"),
    (24.5, {"digits": 4}, "24.50"),
    (99.996, {"digits": 4}, "100.0"),
    (999999.6, {"digits": 4}, "1.000×10⁶"),
    (999999.4, {"digits": 4}, "999999"),
    (999999.96, {"digits": 8}, "999999.96"),
    (0.0001, {"digits": 2}, "0.00010"),
    (0.00001, {"digits": 2}, "1.0×10⁻⁵"),
    (6.25e-14, {"digits": 2, "minus": "-"}, "6.2e-14"),
    (-0.756, {"decimals": 2}, "−0.76"),
    (-0.001, {"decimals": 2}, "0.00"),
    (1e6, {"decimals": 1}, "1000000.0"),
    (3.155e-17, {"decimals": 3}, "0.000"),
]


@pytest.mark.parametrize(("value", "options", "expected"), WRITTEN)
def test_a_number_is_displayed(value: float, options: dict[str, object], expected: str) -> None:
    assert write_number(value, **options) == expected  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (0.1, "0.1"),
        (-0.0, "-0"),
        (100000.0, "100000"),
        (1e22, "1e22"),
        (1e-5, "1e-5"),
        (1 / 3, "0.3333333333333333"),
    ],
)
def test_the_exact_text_is_the_shortest_one(value: float, expected: str) -> None:
    assert write_exact(value) == expected


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_is_not_written(value: float) -> None:
    message = f"{value} is not a finite number, so it cannot be written: leave the cell empty."
    for write in (write_exact, write_number):
        with pytest.raises(NumberError) as caught:
            write(value)
        assert str(caught.value) == message


def test_contradictory_digits_are_refused() -> None:
    with pytest.raises(ValueError, match="digits or decimals, not both"):
        write_number(1.0, 2, decimals=2)
    for options in ({"digits": 0}, {"decimals": -1}):
        with pytest.raises(ValueError, match="at least one digit"):
            write_number(1.0, **options)  # type: ignore[arg-type]
