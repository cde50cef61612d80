"""Results drawn for people: PDF, terminal, given values and drawings. It draws stored results and never reckons."""

from server.sheets.composition import STANDING_CAUTION, SheetData
from server.sheets.diagrams import diagram_svg, flow_svg, joint_svg
from server.sheets.given import Group, Row, given
from server.sheets.loads_drawing import loads_svg
from server.sheets.pdf import UnprintableError, pdf, unprintable
from server.sheets.section_drawing import section_svg
from server.sheets.terminal import terminal
from server.sheets.values import governing, quantity, utilisation, verdict

__all__ = [
    "STANDING_CAUTION",
    "Group",
    "Row",
    "SheetData",
    "UnprintableError",
    "diagram_svg",
    "flow_svg",
    "given",
    "governing",
    "joint_svg",
    "loads_svg",
    "pdf",
    "quantity",
    "section_svg",
    "terminal",
    "unprintable",
    "utilisation",
    "verdict",
]
