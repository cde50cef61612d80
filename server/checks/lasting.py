"""Load that stays and load that repeats, against what a bond bears of it: shared by splices and members."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from server import documents
from server.checks.resistance import Findings
from server.working import Working

SUSTAINED = "eta_s/c_creep"
ONE_LEVEL = "eta_R*gamma_f/s_N"
DAMAGE = "sum(n/N)"
LINE = "A*N**(-m)"
ISO_9664 = "ISO 9664, S-N line of the shop's own tests"
MINER = "linear damage sum (Palmgren, Miner)"

Use = Callable[[float], float | None]
"""Share of the load -> the largest part of its resistance that a bond then uses; None where that is not known."""


@dataclass(frozen=True)
class Lasting:
    """One verdict on lasting or repeated load: the block of the result, and how much of its limit is used."""

    result: dict[str, object]
    utilisation: float
    line: str


def sustained(
    share: float | None,
    adhesive: documents.Adhesive,
    name: str,
    use: Use,
    book: Working,
    findings: Findings,
    where: str,
) -> Lasting | None:
    """The lasting share of the load against the adhesive's creep limit."""
    if not share:
        return None
    if adhesive.creep_limit is None:
        findings.miss(
            f"creep_limit of adhesive {name!r} ({where}): {share * 100:.3g} % of the load stays, and what part of its "
            "strength the adhesive bears for ever is not known; sustained-load tests (ISO 15109, ASTM D2294) give it."
        )
        return None
    used = use(share)
    if used is None or adhesive.creep_limit == 0:
        findings.miss(f"what of the resistance of adhesive {name!r} the lasting load uses ({where}).")
        return None
    value = book.step(
        f"Lasting load on adhesive {name}, {where}",
        "eta_creep",
        SUSTAINED,
        {"eta_s": (used, ""), "c_creep": (adhesive.creep_limit, "")},
        "",
        f"use under the {share * 100:.3g} % of the load that stays, over the creep limit of the value",
        group="Lasting and repeated load",
    )
    return Lasting(
        {
            "what": f"lasting load on adhesive {name}",
            "where": where,
            "share": share,
            "use": used,
            "creep_limit": adhesive.creep_limit,
            "utilisation": value,
        },
        value,
        f"lasting load on adhesive {name}: {value:.3g} of its creep limit used",
    )


def repeated(
    fatigue: documents.Fatigue | None,
    adhesive: documents.Adhesive,
    name: str,
    use: Use,
    book: Working,
    findings: Findings,
    where: str,
) -> Lasting | None:
    """Cycles of load against the adhesive's fatigue strength: one level by its share, several by their damage sum."""
    if fatigue is None:
        return None
    borne = adhesive.fatigue
    most = max(block.cycles for block in fatigue.every)
    if borne is None:
        findings.miss(
            f"fatigue strength of adhesive {name!r} ({where}): {most:.3g} cycles are asked, and what share of its "
            "static strength it bears for them is not known; cyclic tests of the joint (ISO 9664) give it."
        )
        return None
    if most > borne.cycles:
        findings.miss(
            f"fatigue strength of adhesive {name!r} for {most:.3g} cycles ({where}): it was tested to "
            f"{borne.cycles:.3g} cycles, and nothing is claimed beyond."
        )
        return None
    used = [use(block.range / fatigue.impact) for block in fatigue.every]
    if any(each is None for each in used):
        findings.miss(f"what of the resistance of adhesive {name!r} the repeated load uses ({where}).")
        return None
    ranges = [float(each or 0.0) * fatigue.factor for each in used]
    if fatigue.impact > 1:
        book.note(
            "Impact left out of the range",
            f"The loads hold a dynamic factor of {fatigue.impact:g}: it counts in the static check, and the range that "
            "repeats is reckoned without it, so that it is not counted twice.",
            group="Lasting and repeated load",
        )
    value, told = 0.0, None
    if len(ranges) == 1:
        value, told = _one(fatigue, borne, ranges[0], book, name, where)
    else:
        value, told = _several(fatigue, borne, ranges, book, name, where)
    if told is None:
        findings.miss(
            f"fatigue strength of adhesive {name!r} above {(borne.share or 0) * 100:.3g} % of its static strength "
            f"({where}): it was tested at one level only, and a block of the load is above it."
        )
        return None
    return Lasting(
        {
            "what": f"repeated load on adhesive {name}",
            "where": where,
            "cycles": [block.cycles for block in fatigue.every],
            "ranges": ranges,
            "impact_left_out": fatigue.impact,
            "factor": fatigue.factor,
            **told,
            "utilisation": value,
        },
        value,
        f"repeated load on adhesive {name}: {value:.3g} of its fatigue strength used",
    )


def _one(
    fatigue: documents.Fatigue, borne: documents.FatigueStrength, used: float, book: Working, name: str, where: str
) -> tuple[float, dict[str, object]]:
    cycles = fatigue.every[0].cycles
    share = borne.share_at(cycles)
    assert share is not None  # cycles beyond the tests were named above
    if borne.share is None:
        share = min(1.0, book.step(
            f"Share of static strength borne for the cycles, adhesive {name}", "s_N", LINE,
            {"A": (borne.intercept or 0.0, ""), "m": (borne.slope or 0.0, ""), "N": (cycles, "")},
            "", ISO_9664, group="Lasting and repeated load",
        ))  # fmt: skip
    value = book.step(
        f"Repeated load on adhesive {name}, {where}", "eta_N", ONE_LEVEL,
        {"eta_R": (used / fatigue.factor, ""), "gamma_f": (fatigue.factor, ""), "s_N": (share, "")},
        "", f"use under the range, over the share borne for {cycles:.3g} cycles", group="Lasting and repeated load",
    )  # fmt: skip
    return value, {"borne": share}


def _several(
    fatigue: documents.Fatigue,
    borne: documents.FatigueStrength,
    used: list[float],
    book: Working,
    name: str,
    where: str,
) -> tuple[float, dict[str, object] | None]:
    counts, lives = [], []
    for block, share in zip(fatigue.every, used, strict=True):
        life = borne.cycles_at(share) if share > 0 else borne.cycles
        if life is None:
            return 0.0, None
        counts.append(block.cycles)
        lives.append(max(min(life, borne.cycles), 1e-9))
    value = book.step(
        f"Damage sum of the blocks of load on adhesive {name}, {where}", "D_f", DAMAGE,
        {"n": (counts, ""), "N": (lives, "")}, "",
        f"{MINER}; lives from {ISO_9664}, none longer than was tested", group="Lasting and repeated load",
    )  # fmt: skip
    return value, {"lives": lives}
