"""How the two sides of a joint share what the member carries, read off the drawing: stacked, or side by side.

Faces that lie flat are stacked: the flow along them ties the pieces. Faces that stand upright with the cut-off part
centred on the neutral axis are side by side, as in a flitch: the parts bend alike and divide the load by bending
stiffness; nothing flows along the joint, and what it hands over from one side to the other is upright.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Literal, Protocol

import numpy as np

from server.checks.crosssection import Body, Site, Stretch
from server.checks.fastened import fastener_of, resistances
from server.checks.joints import JointCheck
from server.checks.resistance import Judge

Sharing = Literal["stacked", "upright", "side by side"]
CENTRED = 0.1  # of the section's depth: a part whose centroid lies no farther from the neutral axis
SHARE = "EI_1/EI"
WORDS = {
    "stacked": "The faces lie flat: stacked, so the flow along them ties the pieces.",
    "upright": "The faces stand upright, the centroids at unlike heights: the flow along them ties the pieces.",
    "side by side": "The faces stand upright, the parts centred alike: side by side, so they share by stiffness.",
}


def sharing(site: Site, stretch: Stretch) -> Sharing:
    """How the joint's two sides share over one stretch."""
    (left, low), (right, high) = site.contact.start.tolist(), site.contact.end.tolist()
    if abs(right - left) >= abs(high - low):
        return "stacked"
    flow = stretch.section.flows.get(site.index)
    if flow is None or flow.split is None or not flow.cut_off:
        return "upright"
    section = stretch.section.properties
    areas, heights = section.pieces.area.tolist(), section.pieces.centroid[:, 1].tolist()
    weights = [(stretch.section.pieces[i].E * areas[i], heights[i]) for i in flow.cut_off]
    centre = sum(weight * height for weight, height in weights) / sum(weight for weight, _ in weights)
    arm = abs(centre - float(section.neutral_axis[1]))
    depth = max(part.top for part in stretch.section.parts) - min(part.bottom for part in stretch.section.parts)
    return "side by side" if arm <= CENTRED * depth else "upright"


class Handed(Protocol):
    """What was reckoned of fasteners that hand a load over: words by the joint's number, and whether it is judged."""

    @property
    def told(self) -> Mapping[int, str]: ...

    @property
    def settled(self) -> bool: ...


def state_sharing(body: Body, joints: list[JointCheck], judge: Judge, handed: Handed | None = None) -> None:
    """Put the sharing into each joint's block; side by side, write the shares and say what the joint hands over."""
    for check in joints:
        site = check.site
        stretch = next((s for s in body.stretches if site.present(s.start, s.end)), None)
        if stretch is None:
            continue
        kind = sharing(site, stretch)
        check.result["sharing"] = kind
        judge.working.note(
            "How the two sides share", WORDS[kind], source="read off the drawing", group=f"Joint {site.id}"
        )
        if kind == "side by side" and judge.actions.shear is not None:
            _by_stiffness(check, stretch, judge, handed)


def _by_stiffness(check: JointCheck, stretch: Stretch, judge: Judge, judged: Handed | None) -> None:
    site, section, actions = check.site, stretch.section, judge.actions
    assert actions.shear is not None
    group, flow = f"Joint {site.id}", section.flows[site.index]
    outside = set(flow.cut_off)
    E = [piece.E for piece in section.pieces]
    pieces, axis = section.properties.pieces, float(section.properties.neutral_axis[1])
    own = sum(
        E[i] * (float(pieces.inertia[i, 0]) + float(pieces.area[i]) * (float(pieces.centroid[i, 1]) - axis) ** 2)
        for i in outside
    )
    names = ", ".join(section.parts[i].name for i in sorted(outside))
    share = judge.working.step(
        f"Share of the load in {names}", "r", SHARE,
        {"EI_1": (own, "N*mm2"), "EI": (section.properties.EI, "N*mm2")},
        unit="", source="side by side: equal curvature, so moments divide by bending stiffness", group=group,
    )  # fmt: skip
    forces = np.abs(actions.response.reaction_force[list(actions.strength)])
    reaction = float(forces.max(initial=0.0))
    handed = judge.working.step(
        "Force handed over at a support", "F_h", "r*R", {"r": (share, ""), "R": (reaction, "N")},
        unit="N", source="where the support bears on the other side of the joint alone; largest reaction", group=group,
    )  # fmt: skip
    check.result["share"] = share
    check.result["handed_over"] = handed
    words = judged.told.get(site.index, "") if judged is not None else ""
    if words and judged is not None and judged.settled:
        text = f"{site.id}: side by side, so {names} takes {100 * share:.0f} % of the load by its stiffness; {words}"
        judge.findings.caution("load sharing", text)
        return
    judge.findings.caution(
        "load sharing",
        f"{site.id}: side by side, so {names} takes {100 * share:.0f} % of the load by its stiffness, and nothing "
        f"flows along the joint. Where supports and loads bear on the other side alone, it hands {handed:,.4g} N "
        f"over at a support{_fasteners(check, handed, judge)}, and the same share of every point load where it stands: "
        "see that it can, or let both sides bear." + (f" By the fasteners' give, {words}" if words else ""),
        answer=True,
    )


def _fasteners(check: JointCheck, handed: float, judge: Judge) -> str:
    """How many fasteners that takes, where they carry and their resistance is known."""
    fastening = check.fastening
    if fastening is None or fastening.strength is None:
        return ""
    resists = resistances(fastening.strength)
    if np.isnan(resists).all():
        return ""
    name, _ = fastener_of(check.site, judge.document)
    least = float(np.nanmin(resists))
    return f", which takes {int(np.ceil(handed / least - 1e-9))} of {name} near it ({least:,.4g} N each)"
