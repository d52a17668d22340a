"""Why two methods stand apart, told from the terms that make the difference."""

from __future__ import annotations

from dataclasses import dataclass

MARKED_DB = 15.0  # apart by more than this, an answer says why
_NOTHING_DB = 1.0


@dataclass(frozen=True, slots=True)
class Terms:
    """What each method takes off free space on one path, as in `methods.MethodFields`. [dB]"""

    curves_db: float
    clearance_angle_db: float
    surroundings_db: float
    obstacle_db: float
    p1546_scatter_db: float
    near_edge_db: float
    diffraction_db: float
    brought_back_db: float
    clearance_angle_deg: float
    effective_height_m: float
    line_of_sight: bool

    @property
    def difference_db(self) -> float:
        """P.1812 less P.1546, as the terms add up."""
        return self._p1546_db - (self.diffraction_db + self.near_edge_db - self.brought_back_db)

    @property
    def _p1546_db(self) -> float:
        taken = self.curves_db + self.clearance_angle_db + self.surroundings_db + self.obstacle_db
        return taken - self.p1546_scatter_db


def apart_reason(difference_db: float, terms: Terms) -> str | None:
    """Say what sets the methods apart; None unless they are more than 15 dB apart.

    difference_db is P.1812 less P.1546. The reason is the largest term of the method that shows less field, or
    what the other one lets scatter make good.
    """
    if abs(difference_db) <= MARKED_DB:
        return None
    reason = _p1546_is_lower(terms) if difference_db > 0 else _p1812_is_lower(terms)
    lower = "P.1546" if difference_db > 0 else "P.1812"
    return f"{lower} shows {abs(difference_db):.0f} dB less: {reason}."


def _p1546_is_lower(terms: Terms) -> str:
    sight = ", where P.1812 finds " + (
        f"{terms.diffraction_db:.0f} dB of diffraction"
        if terms.diffraction_db >= _NOTHING_DB
        else "the line to the antenna clear"
        if terms.line_of_sight
        else "no loss by diffraction"
    )
    side = "over" if terms.effective_height_m >= 0 else "below"
    height = f" for an antenna {abs(terms.effective_height_m):.0f} m {side} the mean ground"
    causes = {
        # the ground as a whole, which P.1812 pays for by diffraction
        f"its curves{height} take {terms.curves_db:.0f} dB off free space{sight}": terms.curves_db
        - max(0.0, terms.diffraction_db),
        f"it takes {terms.clearance_angle_db:.0f} dB for ground that rises {terms.clearance_angle_deg:.1f}° before "
        f"the aerial, however high the antenna stands{sight}": terms.clearance_angle_db,
        f"it takes {terms.surroundings_db:.0f} dB for the height of the aerial among what stands round it, where "
        f"P.1812 takes {terms.near_edge_db:.0f} dB": terms.surroundings_db - terms.near_edge_db,
        f"in P.1812, scatter and layers in the air bring back {terms.brought_back_db:.0f} dB": terms.brought_back_db,
    }
    return max(causes, key=lambda cause: causes[cause])


def _p1812_is_lower(terms: Terms) -> str:
    taken_db = terms.curves_db + terms.clearance_angle_db
    causes = {
        f"it takes {terms.near_edge_db:.0f} dB for what stands round the roof, where P.1546 takes "
        f"{terms.surroundings_db + terms.obstacle_db:.0f} dB": terms.near_edge_db
        - terms.surroundings_db
        - terms.obstacle_db,
        f"it finds {terms.diffraction_db:.0f} dB of diffraction on this path, where the curves and corrections of "
        f"P.1546 take {taken_db:.0f} dB": terms.diffraction_db - taken_db,
        f"in P.1546, scatter in the air brings back {terms.p1546_scatter_db:.0f} dB": terms.p1546_scatter_db,
    }
    return max(causes, key=lambda cause: causes[cause])
