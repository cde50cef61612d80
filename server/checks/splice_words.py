"""Cautions of a splice: what a careful engineer would say beside its numbers."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from server.checks.resistance import Findings
from server.checks.splice_bond import Stresses
from server.checks.splice_curve import Change
from server.checks.splice_model import Model

NOT_CHECKED = (
    "the adherends away from the joint: net sections, holes, local buckling, stability under compression",
    "peeling by loads that bend the adherends out of plane other than those given",
    "spew fillets, rounded ends, and the adherends' own shear: they relieve the ends, and are left out",
    "ageing, moisture and temperature of the adhesive: only by the factors of its value",
    "fire",
    "workmanship: surface preparation, bond-line thickness, cure, voids",
)
LIGHT = 0.1  # of the yield stress; Hart-Smith: a middle no more stressed than this does not creep
LONG_LASTING = ("permanent", "long-term", "long term")
SLOPE_FOR_STRENGTH, SLOPE_OF_PLYWOOD, BEST_EFFICIENCY = 12.0, 8.0, 0.9  # Wood Handbook, ch. 10
WOOD_BELOW = 25e3  # MPa; stiffer materials are no wood
LEAST_FACTOR = 2.0


def add_cautions(
    model: Model, stresses: Stresses | None, result: Mapping[str, object], changes: Sequence[Change], findings: Findings
) -> None:
    """Everything that deserves a word, in the order in which the sheet prints it."""
    document = model.document
    _lap_value(model, result, findings)
    if model.lap is not None and (model.lap.inner.taper or model.lap.outer.taper):
        findings.caution(
            "tapered ends",
            "The taper is reckoned as drawn: its outer face slopes evenly, its bonded face stays straight, and its tip "
            "is as thick as entered. A tip that is left thicker, or lifts when it is made, brings the end stress back.",
            answer=True,
        )
    if stresses is not None:
        _ends(findings)
        _longer(model, result, changes, findings)
        _creep(model, stresses, findings)
    if document.layout == "scarf":
        _scarf(model, findings)
    if model.axial < 0:
        findings.caution(
            "compression",
            "The joint is pushed together: its edge moments are taken with the full eccentricity, without what its "
            "deflection adds. Hold the adherends against bending near the joint.",
            answer=True,
        )
    if document.layout == "tube-lap":
        findings.caution(
            "tube",
            "Free strain across the bond of a tube (one tube growing faster than the other, or the adhesive "
            "shrinking) is not reckoned.",
        )
    if document.layout == "strap":
        findings.caution(
            "one-sided strap",
            "The strap meets the whole eccentricity at the butt: its edge moment there is nearly P (t_i + t_o) / 2. "
            "Straps on both sides, or a scarf, avoid it.",
        )
    _basis(model, findings)


def _lap_value(model: Model, result: Mapping[str, object], findings: Findings) -> None:
    lap_strength, mean = model.adhesive.shear_strength, result["mean_shear"]
    if lap_strength is None or not isinstance(mean, float):
        return
    findings.caution(
        "lap-shear value",
        f"The mean shear over this overlap is {mean:.4g} MPa; the lap coupons broke at {lap_strength:.4g} MPa, which "
        "is a mean over the coupons' own overlap. They are shown side by side and are not set against each other: "
        "another overlap has another ratio of peak to mean.",
    )


def _ends(findings: Findings) -> None:
    findings.caution(
        "end stresses",
        "Stresses at the very ends are those of beams on springs: an upper estimate, which a spew fillet and the "
        "adherends' own shear relieve. They are judged as they stand.",
    )


def _longer(model: Model, result: Mapping[str, object], changes: Sequence[Change], findings: Findings) -> None:
    by_name = {change.what: change for change in changes}
    longer = by_name.get("overlap longer by half")
    useful = result.get("overlap_useful")
    if longer is None or not isinstance(useful, float):
        return
    better = sorted(
        (c for c in changes if c.gain > max(0.05, longer.gain + 0.02)), key=lambda change: change.gain, reverse=True
    )
    told = ", ".join(f"{c.what} ({c.gain * 100:+.0f} %)" for c in better[:4]) or "none of the changes tried"
    why = _why(model, longer)
    findings.caution(
        "overlap",
        f"Half as much overlap again changes the strength by {longer.gain * 100:+.1f} %; beyond {useful:.4g} mm, 10 % "
        f"more overlap brings less than 1 %. {why} What helps more here: {told}.",
    )


def _why(model: Model, longer: Change) -> str:
    """Why length helps as little as it does."""
    if longer.gain > 0.2:
        return "This overlap is short enough for length to help."
    why = (
        "The ends of the bond carry most of the load and its middle little, so length added in the middle adds little."
    )
    if model.document.layout == "single-lap" and longer.gain > 0.01:
        why += " What a longer single lap gains is that it turns into the line of its load, which relieves its edges."
    return why


def _creep(model: Model, stresses: Stresses, findings: Findings) -> None:
    """A lightly stressed middle is what keeps a lap under lasting load from creeping away."""
    tau_y, document = model.adhesive.shear_yield, model.document
    lasting = bool(document.sustained) or (document.duration or "") in LONG_LASTING
    if tau_y is None or model.lap is None or model.lap.layout == "scarf":
        return
    least = float(np.abs(stresses.shear[: len(stresses.at)]).min())
    if lasting and least > LIGHT * tau_y:
        findings.caution(
            "lightly stressed middle",
            f"The least shear along this overlap is {least:.3g} MPa, {least / tau_y * 100:.0f} % of the yield stress. "
            "Under a load that stays the whole bond may creep: more overlap is no stronger, but leaves a middle that "
            f"is hardly stressed (no more than {LIGHT * 100:.0f} % of yield is common practice) and holds the joint "
            "in place.",
            answer=True,
        )
    elif lasting:
        findings.caution(
            "lightly stressed middle",
            f"The least shear along this overlap is {least:.3g} MPa, {least / tau_y * 100:.1f} % of the yield stress: "
            "a middle so lightly stressed keeps the joint from creeping. Do not shorten the overlap because its "
            "strength would stay the same.",
        )


def _scarf(model: Model, findings: Findings) -> None:
    slope = model.document.slope or 0.0
    E = [material.E for material in model.materials]
    if max(E) > 1.02 * min(E):
        findings.caution(
            "stiffness imbalance",
            f"The pieces differ in stiffness ({min(E):.4g} and {max(E):.4g} MPa): the shear gathers at the tip of the "
            f"stiffer piece, up to {max(E) / min(E):.3g} times the mean on a long slope.",
        )
    if max(E) < WOOD_BELOW:
        findings.caution(
            "scarf efficiency",
            f"Slope 1 : {slope:g}. As an indication only: wood is about ten times as strong in tension as in shear, "
            f"so that slopes of 1 : {SLOPE_FOR_STRENGTH:g} or flatter give the highest strength, plywood is commonly "
            f"scarfed at 1 : {SLOPE_OF_PLYWOOD:g}, and well-made scarf and finger joints reach up to "
            f"{BEST_EFFICIENCY * 100:.0f} % of clear wood in tension (Wood Handbook, FPL-GTR-282, chapter 10). "
            "Fingers are scarfs side by side: enter half the pitch as thickness, half the blunt tip as tip, and as "
            "width the piece's own times the number of flanks; blunt tips join nothing and cut the section. "
            "Test bending or tension coupons (EN 15497, ASTM D4688).",
            answer=slope < SLOPE_OF_PLYWOOD,
        )


def _basis(model: Model, findings: Findings) -> None:
    basis = model.document.basis
    factor = basis.factor("adhesive")
    if basis.method == "allowable" and factor is not None and factor < LEAST_FACTOR:
        findings.caution(
            "safety factor",
            f"The safety factor on the adhesive is {factor:g}; common practice asks for an adhesive at least twice as "
            "strong as the largest stress.",
            answer=True,
        )
