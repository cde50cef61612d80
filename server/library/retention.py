"""What conditioning leaves of a strength: a factor from a pair of coupon sets, dry and conditioned."""

from __future__ import annotations

from dataclasses import dataclass

from server.errors import Fault
from server.library.coupon_sets import coupon_result, result_value
from server.library.record import Record


@dataclass(frozen=True)
class Retention:
    """Conditioned over dry, by the means and by the characteristic values; ``factor`` is what may be multiplied.

    The factor is the lower of the two, and at most 1: conditioning that also adds scatter takes more off the
    characteristic value than off the mean.
    """

    of_means: float
    of_characteristics: float | None
    factor: float


def retention(faults: list[Fault], path: str, dry: Record, conditioned: Record) -> Retention | None:
    """Return what conditioning leaves; faults where the two sets are no pair."""
    if dry.key == conditioned.key:
        faults.append(Fault(path, f"{dry.key} is both the dry and the conditioned set; name the two sets of the pair."))
        return None
    measured = dry.values["property"]
    if conditioned.values["property"] != measured:
        message = f"{dry.key} is a set of {measured}, {conditioned.key} of {conditioned.values['property']}."
        faults.append(Fault(path, f"{message} A pair measures the same."))
        return None
    before, after = coupon_result(dry), coupon_result(conditioned)
    if not before["mean_stress"] > 0:
        faults.append(Fault(path, f"{dry.key} has no strength to compare with."))
        return None
    of_means = float(after["mean_stress"] / before["mean_stress"])
    characteristic, left = before["characteristic"], result_value(after, measured)
    of_characteristics = float(after["characteristic"] / characteristic) if characteristic and left else None
    found = [of_means] if of_characteristics is None else [of_means, of_characteristics]
    if not min(found) > 0:
        faults.append(Fault(path, f"{conditioned.key} left no strength: no factor can be found from it."))
        return None
    return Retention(of_means, of_characteristics, min(1.0, *found))
