"""Kind "glue-up": what is mixed, when it must be closed, and how it is pressed, for one bonded member."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil

from server import ENGINE, documents, units
from server.checks.glue_up_areas import Bond, bonds_of, pressed_by_fasteners, run_length
from server.checks.glue_up_cautions import cautions
from server.checks.resistance import Findings
from server.documents.glue_up import GlueUpDocument, too_large
from server.errors import DocumentError, Fault
from server.working import Working, exceeds

SPREAD = "mass of a spread by area"
TIME = "time = area / rate"
CLAMPS = "pressure = force / area"
LISTED = 200  # mixes written out one by one
ROUNDING = 1e-9  # a share of one more mix or clamp that is rounding
NOT_CHECKED = (
    "what the joints carry: the member check says that",
    "how the surfaces are prepared, and whether the adhesive suits the materials and the service",
    "the climate on the day: temperature of air and of the bond line, humidity, dew point, moisture of the wood",
    "whether clamps, cauls and floor hold the force, and whether it presses evenly",
    "curing after the press: handling, machining and loading wait for the data sheet's times",
)


@dataclass(frozen=True)
class Times:
    """How long the whole takes and how it is mixed [min]; None where a number lacks."""

    assembly: float | None = None
    mixes: int | None = None
    limit: float | None = None
    fits: bool | None = None
    used: float | None = None


@dataclass(frozen=True)
class Pressing:
    """Force of all clamps [N], their number, spacing [mm] and force per length [N/mm]; None where a number lacks."""

    force: float | None = None
    count: int | None = None
    spacing: float | None = None
    per_length: float | None = None
    used: float | None = None


def run(document: GlueUpDocument, *, working: bool = True) -> dict[str, object]:
    """Plan one glue-up as contract.md's kind "glue-up" says; ``working`` false leaves the steps out.

    Raises
    ------
    DocumentError
        If the member check has no bonded joint, or more is to be pressed than is bonded.
    """
    book, findings = Working(record=working), Findings()
    bonds = bonds_of(document, book, findings)
    book.begin("Area")
    area = book.step(
        "Area to be bonded", "A", "sum(A_i)", {"A_i": ([each.area for each in bonds], "mm2")}, "mm2", "sum of all bonds"
    )
    mass, volume = _mass(document, area, book, findings)
    times = _times(document, area, book, findings)
    pressing = _pressing(document, area, bonds, book, findings)
    cautions(document, bonds, pressing.spacing, pressed_by_fasteners(document), findings)
    shares = [share for share in (times.used, pressing.used) if share is not None]
    used = max(shares, default=None)
    return {
        **document.head,
        "verdict": _verdict(used, findings),
        "utilisation": used,
        "governing": _governing(times, pressing, document),
        "area": area,
        "bonds": [each.as_result() for each in bonds],
        "adhesive_mass": mass,
        "adhesive_volume": volume,
        "mixes": times.mixes,
        "mix_plan": _plan(times, area, mass, document),
        "assembly_time": times.assembly,
        "time_limit": times.limit,
        "fits_open_time": times.fits,
        "pot_life": document.glue.pot_life,
        "open_time": document.glue.open_time,
        "press_time": document.glue.press_time,
        "pressure": document.glue.pressure,
        "clamp_force": pressing.force,
        "clamps": pressing.count,
        "clamp_spacing": pressing.spacing,
        "clamp_force_per_length": pressing.per_length,
        "product": document.glue.product,
        "areas_from": document.areas_from or _check_title(document),
        "cautions": findings.cautions,
        "missing": findings.missing,
        "not_checked": list(NOT_CHECKED),
        "steps": book.steps,
        "values_used": _values_used(document, bonds),
        "engine": ENGINE,
    }


def _check_title(document: GlueUpDocument) -> str:
    if document.check is None:
        return ""
    return f"member check “{document.check.title}”" if document.check.title else "the member check given"


def _mass(
    document: GlueUpDocument, area: float, book: Working, findings: Findings
) -> tuple[float | None, float | None]:
    """Mass [kg] and volume [mm3] to be mixed."""
    glue = document.glue
    if glue.spread is None:
        findings.miss("mass of adhesive: adhesive.spread, the mass on each face in g/m2, from its data sheet.")
        return None, None
    book.begin("Adhesive")
    given = {
        "m_s": (glue.spread, "g/m2"),
        "n_s": (float(glue.sides), ""),
        "A": (area, "mm2"),
        "w": (glue.waste, ""),
    }
    note = "The spread is that of each face; waste is what stays in pot, on roller and floor."
    mass = book.step("Mass to be mixed", "m", "m_s*n_s*A*(1 + w)/1e9", given, "kg", SPREAD, note=note)
    if glue.density is None:
        return mass, None
    volume = {"m": (mass, "kg"), "rho": (glue.density, "kg/m3")}
    return mass, book.step("Volume to be mixed", "V_m", "m/rho*1e9", volume, "mm3", "volume = mass / density")


def _times(document: GlueUpDocument, area: float, book: Working, findings: Findings) -> Times:
    glue, rate = document.glue, document.assembly_rate
    for what, value, where in (
        ("mixes and time limit", glue.pot_life, "adhesive.pot_life (of a one-part adhesive its working life)"),
        ("time limit and whether it fits", glue.open_time, "adhesive.open_time, from spreading to full pressure"),
        ("time in the press", glue.press_time, "adhesive.press_time"),
        ("mixes and whether it fits", rate, "assembly_rate, the area the hands at work spread and close in a minute"),
    ):
        if value is None:
            findings.miss(f"{what}: {where}.")
    book.begin("Time")
    limit = None
    if glue.pot_life is not None and glue.open_time is not None:
        limits = {"t_pot": (glue.pot_life, "min"), "t_open": (glue.open_time, "min")}
        note = "What is spread of one mix is closed within this time."
        limit = book.step("Time limit of a mix", "t_lim", "min(t_pot, t_open)", limits, "min", "data sheet", note=note)
    if rate is None:
        return Times(limit=limit)
    needed = book.step("Assembly time", "t", "A/v", {"A": (area, "mm2"), "v": (rate, "mm2/min")}, "min", TIME)
    mixes = None
    if glue.pot_life is not None:
        pots = {"t": (needed, "min"), "t_pot": (glue.pot_life, "min")}
        lives = book.step("Pot lives that the assembly takes", "k", "t/t_pot", pots, source=TIME)
        mixes = _rounded_up(lives)
        text = "A mix is spread before its pot life ends: rounded up."
        book.note("Mixes", text, float(mixes), symbol="n_mix")
    if glue.open_time is None:
        return Times(needed, mixes, limit)
    given = {"t": (needed, "min"), "t_open": (glue.open_time, "min")}
    note = "The member goes into the press as one: what was spread first is still open when the last clamp is tight."
    used = book.step("Share of the open time", "eta_t", "t/t_open", given, source="data sheet", note=note)
    return Times(needed, mixes, limit, not exceeds(used), used)


def _pressing(document: GlueUpDocument, area: float, bonds: list[Bond], book: Working, findings: Findings) -> Pressing:
    glue, clamps = document.glue, document.clamps
    if clamps.area is not None and clamps.area > area * (1 + ROUNDING):
        raise DocumentError([Fault("clamps.area", too_large(clamps.area, area))])
    if glue.pressure is None:
        findings.miss("clamp force, clamps and their spacing: adhesive.pressure; enter 0 for contact pressure.")
        return Pressing()
    book.begin("Clamps")
    pressed = area if clamps.area is None else clamps.area
    pressure = {"p": (glue.pressure, "MPa"), "A_p": (pressed, "mm2")}
    force = book.step("Force of all clamps", "F", "p*A_p", pressure, "N", CLAMPS)
    length = run_length(bonds)
    per_length = None
    if length is not None:
        along = {"F": (force, "N"), "L": (length, "mm")}
        per_length = book.step("Force along the member", "F_L", "F/L", along, "N/mm", CLAMPS)
    counts: list[int] = []
    if clamps.force is not None:
        share = {"F": (force, "N"), "F_1": (clamps.force, "N")}
        counts.append(_rounded_up(book.step("Clamps by force", "k_F", "F/F_1", share, source=CLAMPS)))
    elif force > 0:
        findings.miss("clamps and their spacing: clamps.force, what one clamp presses with.")
        return Pressing(force, per_length=per_length)
    if length is not None and clamps.reach is not None:
        reach = {"L": (length, "mm"), "l_1": (clamps.reach, "mm")}
        source = "a clamp presses its reach along the bond"
        counts.append(_rounded_up(book.step("Clamps by reach", "k_L", "L/l_1", reach, source=source)))
    elif clamps.reach is None and force > 0:
        findings.miss("whether the clamps stand close enough: clamps.reach, the length that one clamp presses.")
    count = max(counts, default=0)
    book.note("Clamps", "The larger number, rounded up.", float(count), symbol="n_c")
    spacing = _spacing(length, count, clamps.reach, book)
    if clamps.available is None:
        return Pressing(force, count, spacing, per_length)
    given = {"n_c": (float(count), ""), "n_a": (float(clamps.available), "")}
    used = book.step("Share of the clamps there are", "eta_c", "n_c/n_a", given, source="needed / available")
    return Pressing(force, count, spacing, per_length, used)


def _spacing(length: float | None, count: int, reach: float | None, book: Working) -> float | None:
    """Even spacing along the bonds; where their length is not known, what one clamp reaches."""
    if length is None:
        if reach is not None:
            book.note("Spacing of the clamps", "No wider than a clamp's reach.", reach, "mm", symbol="a_c")
        return reach
    if count == 0:
        return None
    even = {"L": (length, "mm"), "n_c": (float(count), "")}
    note = "The first and the last clamp stand half of it from the ends."
    return book.step("Spacing of the clamps", "a_c", "L/n_c", even, "mm", "spread evenly", note=note)


def _rounded_up(value: float) -> int:
    return ceil(value * (1 - ROUNDING))


def _plan(times: Times, area: float, mass: float | None, document: GlueUpDocument) -> list[dict[str, object]]:
    """Every mix in turn, alike: minutes count from when the first is mixed."""
    if times.mixes is None or times.assembly is None or document.glue.pot_life is None:
        return []
    n, open_time = times.mixes, document.glue.open_time
    starts = [k * times.assembly / n for k in range(min(n, LISTED))]
    return [
        {
            "number": number,
            "area": area / n,
            "mass": None if mass is None else mass / n,
            "mixed_at": start,
            "spread_by": start + document.glue.pot_life,
            "close_by": None if open_time is None else start + open_time,
        }
        for number, start in enumerate(starts, 1)
    ]


def _verdict(used: float | None, findings: Findings) -> str:
    if used is not None and exceeds(used):
        return "fail"
    return "not proven" if findings.missing else "pass"


def _governing(times: Times, pressing: Pressing, document: GlueUpDocument) -> str:
    if pressing.used is not None and pressing.used > (times.used or 0.0):
        return f"{pressing.count} clamps are needed, {document.clamps.available} are there"
    if times.assembly is None:
        return "no assembly rate is given, so nobody can tell how long it takes"
    took = f"spreading and closing takes {units.show(times.assembly, 'time')}"
    if document.glue.open_time is None:
        return f"{took}; no open time is given"
    return f"{took} of {units.show(document.glue.open_time, 'time')} open time"


def _values_used(document: GlueUpDocument, bonds: list[Bond]) -> dict[str, object]:
    """The adhesives that are spread, whole: no strength of them is used, but what became of them is asked."""
    named: dict[str, object] = dict(document.adhesives)
    if document.check is not None:
        named = {each.adhesive: document.check.adhesives[each.adhesive] for each in bonds} | named
    adhesives = {
        name: each.model_dump(by_alias=True, exclude_none=True, mode="json")
        for name, each in named.items()
        if isinstance(each, documents.Adhesive)
    }
    return {"materials": {}, "adhesives": adhesives, "fasteners": {}}
