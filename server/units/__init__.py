"""Quantities as people type them, in and out of N, mm, MPa.

A plain number is in the contract's unit of its kind (``KINDS[kind].unit``); text carries its own unit. Conversion
factors are exact: the inch is 25.4 mm, the pound 0.45359237 kg, standard gravity 9.80665 m/s2 (NIST SP 811,
appendix B; all three by definition), so each is held as a fraction and a quantity is rounded once, at the end.

How numbers are read: ``4.2``, ``1e3``, ``3/4``, ``5 1/2``, ``11-5/8``, ``5½``; thousands in groups of three by commas
or spaces, ``1,200 psi``, ``12 000 N``; one decimal comma, ``4,2 m``. One comma before exactly three digits is a
thousand in US customary units, where there is no other reading; with an SI unit or none (``1,200 m``) it may be either
and is refused. A mass is never taken for a force, except ``kg/m2`` and ``lb/ft2`` for an area load: times g.
"""

from server.units.reading import LONGEST, given, parse
from server.units.showing import THIN, degrees, digits, display_unit, scale_of, show, unit_of
from server.units.table import GRAVITY, KINDS, Kind

__all__ = [
    "GRAVITY",
    "KINDS",
    "LONGEST",
    "THIN",
    "Kind",
    "degrees",
    "digits",
    "display_unit",
    "given",
    "parse",
    "scale_of",
    "show",
    "unit_of",
]
