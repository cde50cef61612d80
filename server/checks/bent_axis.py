"""Where the neutral axis lies while a member bends about both axes: its direction at the place where it bends most."""

from __future__ import annotations

import numpy as np

from server.checks.actions import Actions
from server.checks.crosssection import CrossSection
from server.mechanics.piecewise import evaluate


def bent_axis(actions: Actions, section: CrossSection) -> dict[str, object] | None:
    r"""Direction (across, up) of the neutral axis, the place and the combination; None where one plane bends alone.

    Curvature ``kappa = F M`` of the moments down and to the right by the section's flexibility ``F``; the normal stress
    ``E (kappa_2 a - kappa_1 u)`` of unsymmetrical bending is 0 along ``(kappa_1, kappa_2)``. It bends most where
    ``M F M`` is greatest, among the turning points of either moment.

    References
    ----------
    .. [1] J. M. Gere and S. P. Timoshenko, "Mechanics of Materials", 4th ed. (1997), 6.5. From memory.
    """
    across = actions.across
    if across is None or across.moment is None or actions.moment is None:
        return None
    curves = (actions.moment, across.moment)
    places = np.unique([at for curve in curves for ends in (curve.whole.at_max, curve.whole.at_min) for at in ends])
    moments = np.stack([evaluate(c.breaks, c.coefficients, places, "left") for c in curves])  # (2, rows, places)
    bent = np.einsum("irp,ij,jrp->rp", moments, section.bending_flexibility, moments)
    if not bent.max() > 0:
        return None
    row, place = np.unravel_index(int(bent.argmax()), bent.shape)
    curvature = section.bending_flexibility @ moments[:, row, place]
    direction = curvature / np.hypot(*curvature)
    if direction[0] < 0:
        direction = -direction
    return {
        "direction": [float(x) for x in direction],
        "at": float(places[place]),
        "combination": actions.strength_names[int(row)],
    }
