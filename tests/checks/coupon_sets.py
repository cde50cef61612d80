"""Coupon documents for the tests: the demo sets (invented numbers) and ways to make others."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from server import checks, documents

Raw = dict[str, Any]

# Stresses of the six demo shops, in N/mm2 or psi; all invented.
ROLLING_SHEAR = [1.92, 1.78, 2.05, 1.66, 1.84, 1.71, 1.97, 1.12, 1.88, 1.75, 1.80, 1.69]
DECK_PSI = [228, 241, 196, 252, 219, 233, 187, 246, 224, 210]
STEEL_TIMBER = [5.6, 6.3, 4.9, 5.8, 6.1, 5.2, 3.1, 5.9, 5.5, 6.0]
PULL_OFF = [1.9, 2.3, 1.7, 2.1, 2.4, 1.8, 2.0, 2.2]
PRIMED = [21.4, 22.6, 20.8, 23.1, 21.9, 22.2, 20.5, 22.8, 21.1, 22.0]
WIPED = [18.2, 20.1, 9.6, 19.4, 14.8, 20.6, 17.3, 19.9]
GFRP_COOL_PSI = [1560, 1720, 1480, 1655, 1390, 1610, 1745, 1525, 1680, 1450]
GFRP_HOT_PSI = [910, 985, 860, 940, 1010, 895]
SPRUCE_DRY = [7.8, 8.4, 7.1, 8.0, 6.6, 7.5, 8.2, 7.3, 4.2]
SPRUCE_CYCLED = [5.1, 6.0, 4.4, 5.5, 3.9, 4.8, 5.7, 4.6]
PSI = 0.006894757293168361  # MPa; NIST SP 811 (2008), appendix B


def coupons(values: Sequence[object], **more: object) -> list[Raw]:
    return [{"stress": value, **more} for value in values]


def document(listed: Sequence[Raw], **statistic: object) -> Raw:
    return {"format": "bondwright/1", "kind": "coupons", "coupons": list(listed), "statistic": statistic}


def run(values: Sequence[object] | Sequence[Raw], **statistic: object) -> Raw:
    """The result for stresses, or for coupons as objects."""
    listed = values if values and isinstance(values[0], dict) else coupons(values)
    return checks.run(documents.read(document(listed, **statistic)))  # type: ignore[arg-type]


def abouts(result: Raw) -> list[str]:
    return [caution["about"] for caution in result["cautions"]]


def texts(result: Raw, about: str) -> str:
    return " ".join(caution["text"] for caution in result["cautions"] if caution["about"] == about)
