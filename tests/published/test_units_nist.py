"""Conversion factors as printed in NIST Special Publication 811 (2008 edition), appendix B.8.

Entered from memory of the printed table, to the seven digits printed there; a factor printed in bold there is exact.
"""

from __future__ import annotations

from decimal import Decimal

import pytest

from server import units

PRINTED = [
    # kind, one of this unit, is so much, of this unit
    ("length", "ft", "3.048E-01", "m"),
    ("length", "in", "2.54E-02", "m"),
    ("length", "mil", "2.54E-05", "m"),
    ("length", "yd", "9.144E-01", "m"),
    ("area", "ft2", "9.290304E-02", "m2"),
    ("area", "in2", "6.4516E-04", "m2"),
    ("mass", "lb", "4.5359237E-01", "kg"),
    ("mass", "oz", "2.834952E-02", "kg"),
    ("force", "lbf", "4.448222E+00", "N"),
    ("force", "kip", "4.448222E+03", "N"),
    ("force", "kgf", "9.80665E+00", "N"),
    ("line_load", "lbf/ft", "1.459390E+01", "N/m"),
    ("line_load", "lbf/in", "1.751268E+02", "N/m"),
    ("couple", "lbf*ft", "1.355818E+00", "N*m"),
    ("couple", "lbf*in", "1.129848E-01", "N*m"),
    ("area_load", "psf", "4.788026E+01", "Pa"),
    ("stress", "psi", "6.894757E+03", "Pa"),
    ("stress", "ksi", "6.894757E+06", "Pa"),
    ("stress", "kgf/cm2", "9.80665E+04", "Pa"),
    ("stress", "bar", "1.0E+05", "Pa"),
    ("density", "lb/ft3", "1.601846E+01", "kg/m3"),
    ("density", "lb/in3", "2.767990E+04", "kg/m3"),
    ("density", "g/cm3", "1.0E+03", "kg/m3"),
    ("spread", "lb/ft2", "4.882428E+00", "kg/m2"),
    ("angle", "deg", "1.745329E-02", "rad"),
]
EXACT = {"ft", "in", "mil", "yd", "ft2", "in2", "lb", "kgf", "kgf/cm2", "bar", "g/cm3"}


@pytest.mark.parametrize(("kind", "unit", "printed", "other"), PRINTED, ids=[row[1] for row in PRINTED])
def test_factors_are_those_printed(kind: str, unit: str, printed: str, other: str) -> None:
    ours = units.parse("x", f"1 {unit}", kind) / units.parse("x", f"1 {other}", kind)
    half_last_digit = 0.0 if unit in EXACT else float(Decimal(5).scaleb(Decimal(printed).as_tuple().exponent - 1))
    assert ours == pytest.approx(float(printed), abs=half_last_digit, rel=1e-15)


def test_a_spread_of_one_pound_per_thousand_square_feet_is_4_88_g_per_m2() -> None:
    # Trade conversion, printed to three digits in adhesive makers' data sheets (common practice).
    assert units.parse("x", "1 lb/MSGL", "spread") == pytest.approx(4.88, abs=0.005)
