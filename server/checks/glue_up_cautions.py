"""What a careful foreman says before a glue-up."""

from __future__ import annotations

from collections.abc import Sequence

from server import units
from server.checks.glue_up_areas import Bond
from server.checks.resistance import Findings
from server.documents.glue_up import GlueUpDocument

HIGHEST_PRESSURE = 1.7  # MPa, for the densest woods: Wood Handbook, FPL-GTR-282 (2021), p. 10-15
CLAMP_ROOM = 50.0  # mm that a clamp takes up along a caul: common practice
WARM_SHOP, COLD_SHOP = 30.0, 10.0  # degC, beyond which most data sheets have no times: common practice
STOPPED = ("on hold", "withdrawn")


def cautions(
    document: GlueUpDocument,
    bonds: Sequence[Bond],
    spacing: float | None,
    fasteners_press: bool,
    findings: Findings,
) -> None:
    """Put every caution of this glue-up into the findings."""
    _of_temperature(document, findings)
    _of_pressing(document, bonds, spacing, fasteners_press, findings)
    _of_the_adhesive(document, bonds, findings)
    findings.caution(
        "climate",
        "Temperature and humidity of the shop, temperature of the pieces (their bond lines lag behind the air) and the "
        "moisture of the wood are not known here: measure them on the day, set them against the data sheet, and write "
        "them on the traveller.",
    )
    findings.caution(
        "assembly time",
        "Data sheets tell open assembly (spread and uncovered) from closed assembly (covered, not yet pressed); thin "
        "spreads, dry or absorbent wood, draught and sun shorten both. A dry trial with all clamps shows what the "
        "hands at work can do.",
    )
    findings.caution(
        "health",
        "Read the safety data sheet before the first mix: gloves and eye protection, ventilation, no skin contact with "
        "resin or hardener, no large mass left in the pot (two-part adhesives heat up).",
    )


def _of_temperature(document: GlueUpDocument, findings: Findings) -> None:
    shop, rated = document.shop_temperature, document.glue.rated_at
    if shop is None or rated is None or shop == rated:
        findings.caution(
            "temperature",
            "Warmth shortens pot life and open time, roughly to a half for 10 K; cold lengthens the time in the press. "
            "The times must be those of the shop's temperature on the day.",
        )
    if shop is None:
        return
    here = f"The shop has {units.show(shop, 'temperature', document.display)}, and"
    if rated is None:
        if not COLD_SHOP <= shop <= WARM_SHOP:
            text = f"{here} the data sheet's temperature is not given: times copied from 20 °C do not hold."
            findings.caution("temperature", text, answer=True)
        return
    held = f"{here} the times hold for {units.show(rated, 'temperature', document.display)}:"
    if shop > rated:
        text = f"{held} pot life and open time are shorter. Enter the data sheet's times for the warmer shop."
        findings.caution("temperature", text, answer=True)
    elif shop < rated:
        text = (
            f"{held} the time in the press is longer, and below the data sheet's least temperature the adhesive does "
            "not cure at all."
        )
        findings.caution("temperature", text, answer=True)


def _of_pressing(
    document: GlueUpDocument,
    bonds: Sequence[Bond],
    spacing: float | None,
    fasteners_press: bool,
    findings: Findings,
) -> None:
    pressure, clamps = document.glue.pressure, document.clamps
    if pressure is not None and pressure > HIGHEST_PRESSURE:
        findings.caution(
            "pressure",
            f"{units.show(pressure, 'stress', document.display)} is more than even the densest woods are pressed with "
            f"({units.show(HIGHEST_PRESSURE, 'stress', document.display)}): it crushes the wood and starves the joint. "
            "Check it.",
            answer=True,
        )
    if pressure == 0:
        findings.caution(
            "pressure", "Contact pressure: the pieces must lie close all over without force, and stay so until cured."
        )
    if spacing is not None and clamps.force is not None and bonds[0].start is not None and spacing < CLAMP_ROOM:
        findings.caution(
            "clamps",
            f"The clamps would stand {units.show(spacing, 'length', document.display)} apart, closer than they are "
            "wide: this set cannot give the pressure. Use a press, stronger clamps, or an adhesive that needs less.",
            answer=True,
        )
    if clamps.reach is not None and any(each.start is None for each in bonds):
        findings.caution(
            "clamps",
            "The length of the bonds is not given: clamps are counted by force alone, and may stand no farther apart "
            "than one of them reaches. Enter width and length of the bonds, or count them along the member.",
            answer=True,
        )
    if len(bonds) > 1 and clamps.area is None and pressure:
        findings.caution(
            "clamps",
            "Force is counted for every bond by itself. Bonds that lie over one another are pressed by the same "
            "clamps: then enter the area of one layer as the area that is pressed at once.",
        )
    if fasteners_press:
        findings.caution(
            "nail pressing",
            "Fasteners are to press this bond: nails, screws and staples press low and unevenly, and do not give "
            "the pressure reckoned here. Use clamps until it has set, or an adhesive that fills gaps and was tested as "
            "pressed so.",
            answer=True,
        )
    if pressure:
        findings.caution(
            "pressure",
            "Clamps give their force only as well as they are tightened, and cauls must spread it; pieces that need "
            "force to close are not ready to be glued.",
        )


def _of_the_adhesive(document: GlueUpDocument, bonds: Sequence[Bond], findings: Findings) -> None:
    """An adhesive that the library holds back is not spread; lots are looked at on the day."""
    entries = dict(document.adhesives)
    if document.check is not None:
        entries |= {each.adhesive: document.check.adhesives[each.adhesive] for each in bonds}
    for name, entry in entries.items():
        status = getattr(entry, "status", None)
        if status in STOPPED:
            findings.miss(f"an adhesive that may be used: {name!r} is {status}.")
    findings.caution(
        "lots",
        "Before mixing look up both components in the lot register: released, in date, stored as told. Write their lot "
        "numbers on the traveller, so that a recall finds this member.",
    )
