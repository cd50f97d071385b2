"""Resisting and driving moment of one slip circle, part by part, for a calculation sheet."""

from dataclasses import dataclass

import numpy as np

from probsoil._typing import BoolArray, FloatArray
from probsoil.ground.profile import Values
from probsoil.ground.response import GroundState
from probsoil.ground.site_model import SiteModel
from probsoil.ground.slip import FillStrength, GroundStrength, slice_strengths
from probsoil.ground.slip_circles import CircleFamily
from probsoil.ground.stability import slip_sections


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class SlipMoments:
    """Critical circle at one time and its moments per metre run; one realisation.

    Attributes
    ----------
    centre_x, centre_y, radius : float, [m]
        Circle; x from the outer toe towards the embankment, y upward from ground level.
    exit_x, entry_x : float, [m]
        Where it leaves and where it enters.
    touch : float, [m]
        Depth of its lowest point, negative above ground level.
    clay_length, sand_length : ndarray, shape (n_zone,), [m]
        Length of the arc in clay and in granular layers beyond the toe, under the slope, under the crest
        and, with berms, under a berm.
    clay_moment, sand_moment : ndarray, shape (n_zone,), [kNm/m]
        Resisting moment of undrained strength and of friction in the same zones.
    fill_friction, fill_cohesion : float, [kNm/m]
        Resisting moment of friction, also below traffic, and of cohesion in the fill.
    fill_friction_form : float, [m3]
        The first, without traffic, per unit weight and tangent of the friction angle.
    traffic_friction_form : float, [m2]
        Friction below traffic per unit pressure and tangent.
    fill_length : float, [m]
        Length of the arc in the fill.
    driving_form : float, [m3]
        Driving moment per unit weight of fill.
    heavier : float, [-]
        Weight that drives over that of the fill in the section: more than 1 where fill was added to hold
        the level.
    traffic_form : float, [m2]
        Driving moment of traffic per unit pressure.
    traffic : float, [kNm/m]
        Driving moment of traffic.
    driving : float, [kNm/m]
        Driving moment of fill and traffic.
    """

    centre_x: float
    centre_y: float
    radius: float
    exit_x: float
    entry_x: float
    touch: float
    clay_length: FloatArray
    sand_length: FloatArray
    clay_moment: FloatArray
    sand_moment: FloatArray
    fill_friction: float
    fill_cohesion: float
    fill_friction_form: float
    traffic_friction_form: float
    fill_length: float
    driving_form: float
    heavier: float
    traffic_form: float
    traffic: float
    driving: float

    @property
    def resisting(self) -> float:
        """Resisting moment in all, [kNm/m]."""
        return float(
            self.clay_moment.sum() + self.sand_moment.sum() + self.fill_friction + self.fill_cohesion
        )

    @property
    def factor(self) -> float:
        """Factor of safety, [-]."""
        return self.resisting / self.driving


def critical_moments(site: SiteModel, values: Values, state: GroundState) -> list[SlipMoments]:
    """Return the moments of the critical circle at every time at which slip is looked at.

    Parameters
    ----------
    site : SiteModel
        With the families of circles that the state was computed with.
    values : mapping of str to ndarray, shape (n_sample,), or float
        Value of every quantity by its address.
    state : GroundState
        The ground's answer.

    Returns
    -------
    moments : list of SlipMoments
        Of the first realisation, one for each of ``site.slip_times``.
    """
    sections = slip_sections(site, values, state.ground, state.strength)
    return [
        _moments(here, fill, family, int(state.response.critical_circle[0, check]))
        for check, ((here, fill), family) in enumerate(zip(sections, site.families, strict=True))
    ]


def _moments(ground: GroundStrength, fill: FillStrength, family: CircleFamily, circle: int) -> SlipMoments:
    n_slice = family.slice_edge.size - 1
    strength = slice_strengths(ground, family.slice_edge, fill.unit_weight.size)[0, :, 0]
    entries = slice(int(family.row_start[circle]), int(family.row_start[circle + 1]))
    column, weight = family.column[entries], family.weight[entries]
    cohesive = column < family.n_zone * n_slice
    zone = (column // n_slice) % family.n_zone
    moment = weight * strength[column]
    in_clay = cohesive & (strength[column] > 0.0)

    def by_zone(amount: FloatArray, which: BoolArray) -> FloatArray:
        found = np.bincount(zone[which], weights=amount[which], minlength=family.n_zone)
        return found.astype(np.float64)

    arc = family.circles[np.array([circle])]
    radius, traffic = float(arc.radius[0]), float(fill.on_top[0] * arc.traffic[0])
    weight_of_fill, tangent = float(fill.unit_weight[0]), float(np.tan(np.radians(fill.friction_angle[0])))
    under_traffic = float(family.traffic_friction[circle]) if fill.on_top[0] else 0.0
    normal = weight_of_fill * float(family.fill_friction[circle]) + float(fill.on_top[0]) * under_traffic
    return SlipMoments(
        centre_x=float(arc.centre_x[0]),
        centre_y=float(arc.centre_y[0]),
        radius=radius,
        exit_x=float(arc.exit_x[0]),
        entry_x=float(arc.entry_x[0]),
        touch=float(arc.touch[0]),
        clay_length=by_zone(weight, in_clay) / radius,
        sand_length=by_zone(weight, cohesive & ~in_clay) / radius,
        clay_moment=by_zone(moment, cohesive),
        sand_moment=by_zone(moment, ~cohesive),
        fill_friction=tangent * normal,
        fill_cohesion=float(fill.cohesion[0] * family.fill_cohesion[circle]),
        fill_friction_form=float(family.fill_friction[circle]),
        traffic_friction_form=under_traffic,
        fill_length=float(family.fill_cohesion[circle]) / radius,
        driving_form=float(arc.driving[0]),
        heavier=1.0 if fill.heavier is None else float(fill.heavier[0]),
        traffic_form=float(arc.traffic[0]),
        traffic=traffic,
        driving=float(fill.driving_weight[0] * arc.driving[0]) + traffic,
    )
