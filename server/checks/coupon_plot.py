"""Where the coupons stand on probability paper, with the line of the distribution that was chosen."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from server.checks.coupon_limits import Limit, Values
from server.documents.coupons import Statistic
from server.mechanics.statistics_plot import median_ranks, normal_place, weibull_place

SHARES = (0.001, 0.01, 0.05, 0.1, 0.25, 0.5, 0.75, 0.9, 0.95, 0.99, 0.999)
MOST = 400  # points that a plot still shows apart
BEYOND = 0.35  # how far the paper reaches beyond what is drawn on it, in places


def probability_plot(x: Values, places: Sequence[int], limit: Limit, statistic: Statistic) -> dict[str, object] | None:
    """Points, line and axis of the plot; None where there are too few coupons or too many to tell apart.

    ``places`` says where each stress stands in the document's list. The line is that of the distribution with the
    scatter reckoned with; the distribution-free value has none.
    """
    of_logs = statistic.distribution in ("lognormal", "weibull")
    if not 2 <= x.size <= MOST or (of_logs and not (x > 0).all()):
        return None
    place = weibull_place if statistic.distribution == "weibull" else normal_place
    order = np.argsort(x, kind="stable")
    shares = median_ranks(x.size)
    at = place(shares)
    target = float(place(1 - statistic.coverage))
    low, high = min(float(at[0]), target) - BEYOND, max(float(at[-1]), target) + BEYOND
    return {
        "paper": "weibull" if statistic.distribution == "weibull" else "normal",
        "logarithmic": of_logs,
        "points": [
            {"index": places[i], "stress": float(x[i]), "share": float(share), "place": float(where)}
            for i, share, where in zip(order, shares, at, strict=True)
        ],
        "line": _line(limit, low, high),
        "axis": [{"share": share, "place": float(place(share))} for share in SHARES if low <= place(share) <= high],
        "asked": {"share": 1 - statistic.coverage, "place": target},
    }


def _line(limit: Limit, low: float, high: float) -> list[dict[str, float]] | None:
    """Two points of the fitted line: straight on the paper's own axes."""
    weibull = limit.extra.get("weibull")
    if isinstance(weibull, dict):
        scale, shape = weibull["scale"], weibull["shape"]
        return [{"place": z, "stress": scale * _exp(z / shape)} for z in (low, high)]
    if limit.used is None:
        return None
    ends = [(z, limit.mean + z * limit.used) for z in (low, high)]
    return [{"place": z, "stress": _exp(value) if limit.of_logs else value} for z, value in ends]


def _exp(power: float) -> float:
    """The exponential; of a scatter beyond all reason at least a finite number, far off the paper."""
    return math.exp(min(max(power, -300.0), 300.0))
