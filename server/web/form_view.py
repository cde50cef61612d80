"""The check form on its page: what templates ask of it. One object a page; nothing here reads or checks."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

from server.library.profiles import profiles
from server.web import form_words, forms, layouts, pieces_boxes
from server.web.form_fields import GROUPS, LOAD_UNITS, SINGLES, UNITS, VALUE_GROUPS, Box, Group, shown_unit

Options = tuple[tuple[str, str], ...]
DURATIONS = ("permanent", "long-term", "medium-term", "short-term", "instantaneous")


@dataclass(frozen=True)
class Form:
    """The boxes as typed, the messages beside them, and where the form's buttons lead.

    ``messages`` are by box. ``records`` are the library's records to choose from, by group. ``opened`` is the part
    that was just changed, ``focus`` the box or button in it to go on from; ``told`` what a button has to say.
    """

    values: Mapping[str, str]
    messages: Mapping[str, str]
    raw: Mapping[str, Any]
    preview_url: str
    shape_url: str
    working_url: str
    save_url: str
    leave_url: str
    library: Mapping[str, Options] = field(default_factory=dict)
    opened: str = ""
    focus: str = ""
    told: str = ""
    revising: bool = False

    @property
    def system(self) -> str:
        """The system the boxes are marked in."""
        return forms.system_of(self.values)

    @cached_property
    def now(self) -> dict[str, str]:
        """What each folded part holds, in words."""
        units = "US customary units" if self.raw.get("display") == "US" else "SI units"
        return form_words.summaries(self.raw, self.values.get("slip") or "auto") | {
            "sheet": units + (", with a note" if self.raw.get("note") else ", no note")
        }

    @cached_property
    def names(self) -> dict[str, list[str]]:
        """Names to offer while typing."""
        section = self.raw.get("section") or {}
        offered = {name: list(self.raw.get(name) or ()) for name in VALUE_GROUPS}
        return offered | {"pieces": list(section.get("pieces") or ()), "durations": list(DURATIONS)}

    @property
    def changed(self) -> list[str]:
        """Boxes whose message changed since the page last showed them."""
        shown = (name for name in self.values.get("shown", "").split() if forms.is_box(name))
        return list(dict.fromkeys((*shown, *self.messages)))

    @cached_property
    def _rows(self) -> dict[str, list[int]]:
        found = {name: list(indexed) for name, indexed in forms.rows(self.values).items()}
        found["adhesives"] = found["adhesives"] or [0]
        return found

    def rows(self, group: str) -> list[int]:
        """Indexes of a group's rows, empty ones included."""
        return self._rows[group]

    @property
    def first_adhesive(self) -> int:
        """The row of the adhesive that the first view asks for."""
        return self._rows["adhesives"][0]

    @property
    def first_boxes(self) -> tuple[str, str]:
        """The boxes of the first adhesive that stand in the first view."""
        return (f"adhesives[{self.first_adhesive}].record", f"adhesives[{self.first_adhesive}].shear_strength")

    @property
    def can_set_out(self) -> bool:
        """Whether the layout's own pieces are still there, so that their places follow from their sizes."""
        return layouts.set_out(self.values) is not None

    @property
    def fastened(self) -> bool:
        """Whether a joint has fasteners, for which a spacing may be asked."""
        return any(text.strip() for name, text in self.values.items() if name.endswith("].fastener"))

    def group(self, name: str) -> Group:
        """Return a group of rows."""
        return GROUPS[name]

    def single(self, name: str) -> Box:
        """Return a box that stands once on the page."""
        return SINGLES[name]

    def unit(self, box: Box) -> str:
        """Return the unit beside a box; a load's unit stands with its kind."""
        return shown_unit(box.unit, self.system) if box.unit in UNITS else ""

    def choices(self, box: Box) -> Options:
        """Return a select's choices; kinds of load say the unit of their value."""
        if not any(value in LOAD_UNITS for value, _ in box.choices):
            return box.choices
        return tuple(
            (value, f"{text} ({shown_unit(LOAD_UNITS[value], self.system)})" if value in LOAD_UNITS else text)
            for value, text in box.choices
        )

    def records(self, name: str) -> Options:
        """Return the library's records for a row of values."""
        return (("", "typed here"), *self.library.get(name.partition("[")[0], ()))

    def typed_box(self, name: str) -> Box | None:
        """Return the box of a text input, None for a select: a select is left alone while somebody uses it."""
        box = SINGLES.get(name)
        if box is None:
            group = GROUPS.get(name.partition("[")[0])
            short = name.rpartition(".")[2]
            box = next((each for each in group.boxes if each.name == short), None) if group else None
        return None if box is None or box.choices or box.name == "record" else box

    def boxes(self, group: Group, index: int) -> tuple[Box, ...]:
        """Return the boxes of a row: of a piece those of its shape."""
        return group.boxes if group.name != "pieces" else pieces_boxes.boxes_shown(self._cells(index))

    def kept(self, group: Group, index: int) -> list[tuple[str, str]]:
        """Return what was typed into boxes that the row does not show now, so that it is there when they come back."""
        shown = self.boxes(group, index)
        names = [f"{group.name}[{index}].{box.name}" for box in group.boxes if box not in shown]
        return [(name, self.values[name]) for name in names if self.values.get(name)]

    def hint(self, name: str, box: Box) -> str:
        """Return the help under a box; under a profile its sizes."""
        if box.name != "profile":
            return box.hint
        return pieces_boxes.sizes_in_words({"profile": self.values.get(name, "")}) or box.hint

    def _cells(self, index: int) -> dict[str, str]:
        return {box.name: self.values.get(f"pieces[{index}].{box.name}", "") for box in GROUPS["pieces"].boxes}

    @property
    def profiles(self) -> tuple[str, ...]:
        """Names of the profiles to offer."""
        return tuple(profiles())

    def more_open(self, group: Group, index: int) -> bool:
        """Say whether a row's seldom-needed boxes hold anything worth seeing at once."""
        names = [(f"{group.name}[{index}].{box.name}", box) for box in self.boxes(group, index) if box.more]
        return any(name in self.messages for name, _ in names) or any(
            self.values.get(name) and not box.choices and box.name not in ("source", "note") for name, box in names
        )

    def is_open(self, part: str) -> bool:
        """Say whether a folded part stands open: rows of it were just changed, or a box in it needs another look."""
        inside = _PARTS.get(part, (part,))
        return self.opened in inside or any(
            name == single or name.partition("[")[0] == single for name in self.messages for single in inside
        )


_PARTS: dict[str, tuple[str, ...]] = {
    "loads": ("loads", "load_case"),
    "member": ("held_sideways", "deflection_limit", "bears_on", "supports", "hinges"),
    "basis": tuple(name for name in SINGLES if name.startswith("basis.")),
    "analysis": ("slip", "shear_deformation", "field", "spacing_step", "rules"),
    "service": ("lowest", "highest", "cure", "moisture"),
    "sheet": ("display", "note", "shop_note"),
}
