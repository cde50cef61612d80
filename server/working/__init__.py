"""A formula's text -> its value and its printed step."""

from server.working.formula import formula
from server.working.grammar import FormulaError
from server.working.numbers import exceeds, readable, readable_unit
from server.working.record import Shown, Working, mathml, plain, shown, typst_math

__all__ = [
    "FormulaError",
    "Shown",
    "Working",
    "exceeds",
    "formula",
    "mathml",
    "plain",
    "readable",
    "readable_unit",
    "shown",
    "typst_math",
]
