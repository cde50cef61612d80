"""Typed quantities: every unit against pint, the forms people type, what is refused, what is shown."""

from __future__ import annotations

import math
import re
from contextlib import suppress

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from server import units
from server.errors import InputError
from server.units.table import FACTORS

REGISTRY = pint.UnitRegistry()
PINT = {
    "in": "inch", "ft": "foot", "yd": "yard", "um": "micrometer", "mil": "thou", "lb": "pound", "oz": "ounce",
    "t": "metric_ton", "lbf": "pound_force", "kip": "kilopound_force", "kgf": "kilogram_force", "gf": "gram_force",
    "tf": "metric_ton_force", "pcf": "pound/foot**3", "plf": "pound_force/foot", "klf": "kilopound_force/foot",
    "psi": "pound_force/inch**2", "ksi": "kilopound_force/inch**2", "psf": "pound_force/foot**2",
    "ksf": "kilopound_force/foot**2", "lb/MSGL": "pound/(1000*foot**2)", "lb/1000ft2": "pound/(1000*foot**2)",
    "lb/1000*ft2": "pound/(1000*foot**2)", "%": "percent", "degC": "delta_degC", "degF": "delta_degF",
    "ppm/K": "1e-6/kelvin", "K": "kelvin", "deg": "degree", "rad": "radian",
}  # fmt: skip
PLAIN = {
    "N/mm2": "megapascal", "MPa": "megapascal", "N*mm": "newton*millimeter", "N/mm": "newton/millimeter",
    "": "dimensionless", "kg/m3": "kilogram/meter**3", "g/m2": "gram/meter**2", "mm2": "millimeter**2",
    "1/K": "1/kelvin", "%": "percent", "deg": "degree", "K": "kelvin", "N": "newton", "mm": "millimeter",
    "kg": "kilogram", "degC": "degC", "min": "minute", "mm2/min": "millimeter**2/minute",
}  # fmt: skip


def to_pint(unit: str) -> str:
    """Our spelling of a unit as an expression for pint."""
    if unit in PINT:
        return f"({PINT[unit]})"
    unit = re.sub(r"^/", "1/", unit)

    def one(match: re.Match[str]) -> str:
        name, power = match[1], match[2]
        return f"({PINT.get(name, name)})" + (f"**{power}" if power else "")

    return re.sub(r"([A-Za-z%]+)(\d?)", one, unit)


EVERY_UNIT = [
    (kind, unit)
    for kind, scales in FACTORS.items()
    if kind != "temperature"
    for unit in scales
    if unit not in ("percent", "radian", "radians")
]


@pytest.mark.parametrize(("kind", "unit"), EVERY_UNIT)
def test_every_unit_agrees_with_pint(kind: str, unit: str) -> None:
    expression = to_pint(unit)
    weighed = kind == "area_load" and unit in ("kg/m2", "lb/ft2")
    quantity = REGISTRY.parse_expression(f"7.25 * {expression}" + (" * standard_gravity" if weighed else ""))
    expected = quantity.to(PLAIN[units.KINDS[kind].unit]).magnitude
    assert units.parse("x", f"7.25 {unit}", kind, bound=math.inf) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize(("unit", "pints"), [("degC", "degC"), ("degF", "degF"), ("K", "kelvin")])
@pytest.mark.parametrize("number", [-40.0, 20.0, 293.15])
def test_temperatures_agree_with_pint(unit: str, pints: str, number: float) -> None:
    expected = REGISTRY.Quantity(number, pints).to("degC").magnitude
    if expected < -273.15:
        with pytest.raises(InputError):
            units.parse("x", f"{number} {unit}", "temperature")
    else:
        assert units.parse("x", f"{number} {unit}", "temperature") == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize(
    ("text", "inches"),
    [
        ("13 ft 9-1/2 in", 165.5),
        ("13' 9-1/2\"", 165.5),
        ("13'-9 1/2\"", 165.5),
        ("13′ 9½″", 165.5),
        ("13 ft 9½ in", 165.5),
        ("13’ 9.5”", 165.5),
        ("13 feet 9.5 inches", 165.5),
        ("13' 9", 165.0),
        ("13 ft 9", 165.0),
        ("5ft6in", 66.0),
        ("13 ft", 156.0),
        ("1/2 ft", 6.0),
        ("3/4 in", 0.75),
        ('3/4"', 0.75),
        ("¾ in", 0.75),
        ("5 1/2 in", 5.5),
        ("5½ in", 5.5),
        ("5\u00a01/2\u2009in", 5.5),
        ("11-5/8 in", 11.625),
        ("11 5⁄8 in", 11.625),
        ("-5 ft 6 in", -66.0),
        ("−5 1/2 in", -5.5),
        ("0 ft 6 in", 6.0),
        ("2 yd", 72.0),
        ("250 mil", 0.25),
        ("250 mils", 0.25),
    ],
)
def test_feet_inches_and_fractions_are_read(text: str, inches: float) -> None:
    assert units.parse("x", text, "length") == pytest.approx(inches * 25.4, rel=1e-15)


@pytest.mark.parametrize(
    ("kind", "text", "value"),
    [
        ("length", "4.2 m", 4200.0),
        ("length", "4.2m", 4200.0),
        ("length", "4,2 m", 4200.0),
        ("length", "0,250 m", 250.0),
        ("length", "12 000 mm", 12000.0),
        ("length", "12\u2009000 mm", 12000.0),
        ("length", "1,234.5 mm", 1234.5),
        ("length", "300 µm", 0.3),
        ("length", "42", 42.0),
        ("length", "0.3 mm", 0.3),
        ("length", "1e3", 1000.0),
        ("length", "1.5E-1 m", 150.0),
        ("line_load", "2.5 kN/m", 2.5),
        ("line_load", "2.5 kN / m", 2.5),
        ("line_load", "2.5 N/mm", 2.5),
        ("area_load", "3 kN/m²", 0.003),
        ("area_load", "3 kN/m^2", 0.003),
        ("area_load", "3 kPa", 0.003),
        ("couple", "1.2 kNm", 1.2e6),
        ("couple", "1.2 kN m", 1.2e6),
        ("couple", "1.2 kN·m", 1.2e6),
        ("couple", "1.2 kN×m", 1.2e6),
        ("couple", "3 N*mm", 3.0),
        ("stress", "11 GPa", 11000.0),
        ("stress", "11 gpa", 11000.0),
        ("stress", "11 mpa", 11.0),
        ("stress", "6 N/mm²", 6.0),
        ("temperature", "68 °F", 20.0),
        ("temperature", "20 °C", 20.0),
        ("temperature", "20 deg C", 20.0),
        ("temperature", "293.15 K", 20.0),
        ("temperature_change", "54 °F", 30.0),
        ("temperature_change", "30 °C", 30.0),
        ("angle", "30°", 30.0),
        ("factor", "80 %", 0.8),
        ("factor", "1,35", 1.35),
        ("moisture", "4 %", 4.0),
        ("area", "1 sq in", 645.16),
        ("force", "2.5 KN", 2500.0),
    ],
)
def test_the_forms_people_type_are_read(kind: str, text: str, value: float) -> None:
    assert units.parse("x", text, kind) == pytest.approx(value, rel=1e-14)


@pytest.mark.parametrize("text", ["900 lbf-ft", "900 lbf ft", "900 ft-lbf", "900 lbf*ft", "900 ft·lbf"])
def test_couples_are_read_in_either_order(text: str) -> None:
    assert units.parse("x", text, "couple") == pytest.approx(900 * 4.4482216152605 * 304.8, rel=1e-14)


@pytest.mark.parametrize("text", ["50 lb/MSGL", "50 lb/1000ft2", "50 lb/1000 ft2", "50 lb / 1000 sq ft"])
def test_spread_rates_per_thousand_square_feet_are_read(text: str) -> None:
    assert units.parse("x", text, "spread") == pytest.approx(50 * 453.59237 / 92.90304, rel=1e-14)


def test_thousands_are_read_where_there_is_one_reading() -> None:
    psi = units.parse("x", "1200 psi", "stress")
    assert units.parse("x", "1,200 psi", "stress") == psi
    assert units.parse("x", "1,200,000 psi", "stress") == pytest.approx(1000 * psi)
    assert units.parse("x", "1,200,000 N", "force") == 1.2e6


@pytest.mark.parametrize("text", ["1,200 m", "1,200", "12,345 N"])
def test_a_comma_with_two_readings_is_refused_with_both(text: str) -> None:
    kind = "force" if text.endswith("N") else "length"
    plain = text.replace(",", "")
    with pytest.raises(
        InputError, match=rf"two ways; write {re.escape(plain)} or {re.escape(text.replace(',', '.'))}\."
    ):
        units.parse("x", text, kind)


@pytest.mark.parametrize(
    "text", ["1.200,5 m", "1,20,300 m", "1.2.3 m", "4,2,1 m", "1,200,30 psi", "--4 m", "4 - m", "00,1,2"]
)
def test_other_groupings_are_refused(text: str) -> None:
    with pytest.raises(InputError):
        units.parse("x", text, "length")


@pytest.mark.parametrize(
    ("kind", "text", "says"),
    [
        ("force", "4 lb", r"is a mass, not a force; it weighs 4 lbf \(17\.79 N\): write 4 lbf"),
        ("force", "5 kg", r"it weighs 5 kgf \(49\.03 N\): write 5 kgf"),
        ("force", "2 t", r"it weighs 2 tf \(19613 N\)"),
        ("line_load", "45 lb/ft", r"is a mass per length, .* it weighs 45 lbf/ft \(0\.6567 N/mm\)"),
        ("stress", "12 kg/cm2", r"it weighs 12 kgf/cm2 \(1\.177 MPa\)"),
        ("couple", "9 lb-ft", r"it weighs 9 lbf\*ft"),
    ],
)
def test_a_mass_for_a_force_is_refused_with_what_it_weighs(kind: str, text: str, says: str) -> None:
    with pytest.raises(InputError, match=says):
        units.parse("x", text, kind)


def test_areas_alone_take_a_mass_at_its_weight() -> None:
    assert units.parse("x", "250 kg/m2", "area_load") == pytest.approx(250 * 9.80665e-6, rel=1e-15)
    assert units.parse("x", "20 lb/ft2", "area_load") == units.parse("x", "20 psf", "area_load")


@pytest.mark.parametrize(
    ("kind", "value", "says"),
    [
        ("length", "4 kg", "'4 kg' is a mass, not a length; enter a length, such as 4.2 m"),
        ("stress", "5 N/mm", "is a line load .force per length., not a stress"),
        ("length", "4 parsec", "has no unit that fits a length"),
        ("length", "abc", "'abc' is not a length"),
        ("length", "", "Nothing was entered"),
        ("length", " \u00a0 ", "Nothing was entered"),
        ("length", "m", "'m' is not a length"),
        ("length", "nan", "'nan' is not a length"),
        ("length", "inf m", "'inf m' is not a length"),
        ("length", math.nan, "NaN is not a finite number"),
        ("length", math.inf, "Infinity is not a finite number"),
        ("length", True, "true is not a length"),
        ("length", None, "null is not a length"),
        ("length", [4], "a list"),
        ("length", {"a": 1}, "an object"),
        ("length", b"4 m", "a bytes"),
        ("length", "4 m" + " " * 60, "longer than 60 characters"),
        ("length", "2 km", "beyond what this program takes"),
        ("length", 10**400, "beyond what this program takes"),
        ("length", "1e400 m", "beyond what this program takes"),
        ("length", "1/0 in", "no proper fraction"),
        ("length", "5 5/4 in", "no proper fraction"),
        ("length", "5 ft 3/0 in", "no proper fraction"),
        ("length", "5 4/4 in", "no proper fraction"),
        ("length", "5 ft 4/4 in", "no proper fraction"),
        ("length", "5 ft 12 in", "12 or more inches"),
        ("stress", "1e8 MPa", "beyond what this program takes"),
        ("temperature", "-300 degC", "beyond what this program takes"),
        ("force", "1 mN", "has no unit that fits a force"),
        ("stress", "5 mPa", "has no unit that fits a stress"),
        ("length", "٤ m", "is not a length"),
    ],
)
def test_nonsense_is_refused_in_one_line_that_names_the_field(kind: str, value: object, says: str) -> None:
    with pytest.raises(InputError, match=says) as caught:
        units.parse("member.length", value, kind)
    assert caught.value.field == "member.length"
    assert "\n" not in str(caught.value)
    assert len(str(caught.value)) < 300


def test_the_bound_can_be_set() -> None:
    assert units.parse("x", "2 km", "length", bound=3e6) == 2e6
    with pytest.raises(InputError, match="beyond"):
        units.parse("x", "2 m", "length", bound=1000.0)
    with pytest.raises(InputError, match="beyond"):
        units.parse("x", -1500, "length", bound=1000.0)


def test_every_example_is_read_as_its_own_kind() -> None:
    for kind in units.KINDS.values():
        for example in re.split(r", | or ", kind.example):
            units.parse("x", example, kind.name)


def test_readable_numbers_round_once() -> None:
    assert units.parse("x", "12 mils", "length") == 0.3048
    assert units.parse("x", "3/4 in", "length") == 19.05
    assert units.parse("x", "1/3 in", "length") == 25.4 / 3


@given(st.text(max_size=70), st.sampled_from(sorted(units.KINDS)))
def test_any_text_is_read_or_refused(text: str, kind: str) -> None:
    with suppress(InputError):
        assert math.isfinite(units.parse("x", text, kind))


@given(st.from_regex(r"[-+]?[0-9 ,./'\"½¾-]{1,14} ?(m|mm|in|ft|'|\"|lbf|kN|psi|%)?", fullmatch=True))
def test_any_number_like_text_is_read_or_refused(text: str) -> None:
    for kind in ("length", "force", "stress", "factor"):
        with suppress(InputError):
            assert math.isfinite(units.parse("x", text, kind))


@given(
    st.one_of(
        st.none(), st.booleans(), st.integers(), st.floats(), st.binary(), st.lists(st.integers()), st.complex_numbers()
    )
)
def test_any_value_is_read_or_refused(value: object) -> None:
    try:
        read = units.parse("x", value, "force")
    except InputError:
        return
    assert read == value
    assert math.isfinite(read)


@given(st.integers(0, 3000), st.integers(0, 11), st.integers(0, 63))
def test_feet_and_inches_equal_the_inches_alone(feet: int, inches: int, sixtyfourths: int) -> None:
    whole = 12 * feet + inches
    typed = units.parse("x", f"{feet} ft {inches}-{sixtyfourths}/64 in", "length")
    marks = units.parse("x", f"{feet}' {inches} {sixtyfourths}/64\"", "length")
    alone = units.parse("x", f"{whole} {sixtyfourths}/64 in", "length")
    assert typed == marks == alone == pytest.approx((whole + sixtyfourths / 64) * 25.4, rel=1e-15)


ORDINARY = st.floats(-1e5, 1e5).filter(lambda value: value == 0 or abs(value) > 1e-3)
SHOWN = sorted(set(units.KINDS) - {"temperature"})


@given(ORDINARY, st.sampled_from(SHOWN), st.sampled_from(["SI", "US"]))
def test_what_is_shown_can_be_typed_back(value: float, kind: str, display: str) -> None:
    if display == "US" and kind in ("angle", "factor", "moisture", "time") and abs(value) >= 999:
        return  # '1,000' without a US unit beside it is refused as having two readings
    text = units.show(value, kind, display)
    # Four digits are shown; a length in feet keeps thousandths of an inch.
    assert units.parse("x", text, kind, bound=math.inf) == pytest.approx(value, rel=5.1e-4, abs=1e-12)


@given(st.floats(-273.0, 1000.0), st.sampled_from(["SI", "US"]))
def test_shown_temperatures_can_be_typed_back(value: float, display: str) -> None:
    text = units.show(value, "temperature", display)
    assert units.parse("x", text, "temperature") == pytest.approx(value, abs=0.51)


@given(ORDINARY, st.sampled_from(EVERY_UNIT))
def test_a_unit_scales_in_proportion(value: float, of: tuple[str, str]) -> None:
    kind, unit = of
    one = units.parse("x", f"1 {unit}", kind, bound=math.inf)
    assert units.parse("x", f"{value!r} {unit}", kind, bound=math.inf) == pytest.approx(value * one, rel=1e-12)


@pytest.mark.parametrize(
    ("value", "kind", "si", "us"),
    [
        (4200.0, "length", "4\u2009200 mm", "13 ft 9.354 in"),
        (0.3, "length", "0.3 mm", "0.01181 in"),
        (12345.6, "length", "12\u2009346 mm", "40 ft 6.047 in"),
        (12 * 12 * 25.4 - 1e-6, "length", "3\u2009658 mm", "12 ft"),
        (2500.0, "force", "2.5 kN", "562 lbf"),
        (250.0, "force", "250 N", "56.2 lbf"),
        (-12345.0, "force", "-12.35 kN", "-2,775 lbf"),
        (2.5, "line_load", "2.5 kN/m", "171.3 lbf/ft"),
        (0.003, "area_load", "3 kN/m²", "62.66 psf"),
        (1.2e6, "couple", "1.2 kN·m", "885.1 lbf·ft"),
        (5e4, "couple", "50 N·m", "36.88 lbf·ft"),
        (11000.0, "stress", "11\u2009000 MPa", "1,595,000 psi"),
        (20.0, "temperature", "20 °C", "68 °F"),
        (30.0, "temperature_change", "30 K", "54 °F"),
        (420.0, "density", "420 kg/m³", "26.22 lb/ft³"),
        (250.0, "spread", "250 g/m²", "51.2 lb/MSGL"),
        (0.8, "factor", "0.8", "0.8"),
        (0.0, "force", "0 N", "0 lbf"),
        (30.0, "angle", "30°", "30°"),
        (1.2e-5, "expansion", "1.2e-5 1/K", "6.667e-6 1/°F"),
    ],
)
def test_quantities_are_shown_as_the_trade_writes_them(value: float, kind: str, si: str, us: str) -> None:
    assert units.show(value, kind) == si
    assert units.show(value, kind, "US") == us


def test_units_for_people_and_their_scales_agree_with_show() -> None:
    for kind in SHOWN:
        for display in ("SI", "US"):
            number = 1.0 * units.scale_of(kind, display)
            unit = units.unit_of(kind, display)
            assert units.parse("x", f"{number!r} {unit}", kind) == pytest.approx(1.0, rel=1e-12)
    with pytest.raises(ValueError, match="not converted by a factor"):
        units.scale_of("temperature")


@pytest.mark.parametrize(
    ("unit", "shown", "pints", "to"),
    [
        ("N/mm", "lbf/in", "newton/millimeter", "pound_force/inch"),
        ("MPa", "psi", "megapascal", "pound_force/inch**2"),
        ("N/mm2", "psi", "megapascal", "pound_force/inch**2"),
        ("mm", "in", "millimeter", "inch"),
        ("mm2", "in2", "millimeter**2", "inch**2"),
        ("mm3", "in3", "millimeter**3", "inch**3"),
        ("mm4", "in4", "millimeter**4", "inch**4"),
        ("1/mm", "1/in", "1/millimeter", "1/inch"),
        ("N*mm", "lbf*in", "newton*millimeter", "pound_force*inch"),
        ("N*mm2", "lbf*in2", "newton*millimeter**2", "pound_force*inch**2"),
        ("N", "lbf", "newton", "pound_force"),
        ("kg/m", "lb/ft", "kilogram/meter", "pound/foot"),
        ("kg/m3", "lb/ft3", "kilogram/meter**3", "pound/foot**3"),
    ],
)
def test_result_units_convert_to_consistent_inch_pounds(unit: str, shown: str, pints: str, to: str) -> None:
    text, factor = units.display_unit(unit, "US")
    assert text == shown
    assert factor == pytest.approx(REGISTRY.Quantity(1.0, pints).to(to).magnitude, rel=1e-12)
    assert units.display_unit(unit, "SI") == (unit, 1.0)


@pytest.mark.parametrize("unit", ["", "1", "%", "deg", "K"])
def test_units_without_an_inch_pound_form_stay(unit: str) -> None:
    assert units.display_unit(unit, "US") == (unit, 1.0)
