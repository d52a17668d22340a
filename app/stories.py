"""From arrays over emissions to the terms of one, for sentences about it."""

from __future__ import annotations

import math

from app.disagreement import Terms
from app.methods import MethodFields
from app.near_roof import Standing
from app.paths_to_roof import Path
from app.request import Method
from app.sentences import Kind, PathStory
from propagation.diffraction import DeltaBullington
from propagation.digest import PathDigest


def story_of(
    path: Path,
    kind: Kind,
    frequency_mhz: float,
    diffraction: DeltaBullington,
    both: MethodFields,
    e: int,
) -> PathStory:
    """Terms of the path of emission e for its sentence."""
    digest = path.digest
    length_km, into_line_m = float(digest.path_length_km), float(digest.obstacle_into_line_m)
    to_roof_km = length_km - float(digest.worst_point_km)
    standing: Standing = "ground"
    near: Standing = path.edges[0].what if path.edges else "ground"
    near_km = path.edges[0].from_roof_km if path.edges else 0.0
    if path.edges and path.clearance_ratio(frequency_mhz) < float(digest.clearance_ratio(frequency_mhz)):
        to_roof_km, into_line_m, standing = near_km, path.edges[0].into_ray_m, near
    brought_back = float(both.brought_back_db[e])
    if math.isnan(both.diffraction_db[e]):
        brought_back = float(both.p1546_scatter_db[e])
    return PathStory(
        kind=kind,
        distance_km=length_km,
        worst_point_km=to_roof_km,
        into_line_m=into_line_m,
        clearance_ratio=path.clearance_ratio(frequency_mhz),
        sea_share=float(digest.sea_km) / length_km,
        standing=standing,
        near=near,
        near_km=near_km,
        near_edge_db=float(both.near_edge_db[e]),
        bulge_m=500 * (length_km - to_roof_km) * to_roof_km / float(digest.effective_earth_radius_km),
        diffraction_loss_db=float(diffraction.loss_db[e]),
        curve_loss_db=float(diffraction.loss_db[e] - diffraction.actual_db[e]),
        brought_back_db=brought_back,
    )


def terms_of(both: MethodFields, digest: PathDigest, e: int) -> Terms:
    """What each method takes off free space for emission e; `digest` stacks the paths of all."""
    return Terms(
        curves_db=float(both.curves_db[e]),
        clearance_angle_db=float(both.clearance_angle_db[e]),
        surroundings_db=float(both.surroundings_db[e]),
        obstacle_db=float(both.obstacle_db[e]),
        p1546_scatter_db=float(both.p1546_scatter_db[e]),
        near_edge_db=float(both.near_edge_db[e]),
        diffraction_db=float(both.diffraction_db[e]),
        brought_back_db=float(both.brought_back_db[e]),
        clearance_angle_deg=float(digest.rx_clearance_angle_deg[e]),
        effective_height_m=float(digest.h1_source_height_m[e]),
        line_of_sight=bool(digest.line_of_sight[e]),
    )


def method_reason(asked: Method, p1812_refusal: str) -> str:
    """Say why the method that was used was used."""
    if asked == "p1546":
        return "P.1546 was asked for"
    if p1812_refusal:
        return f"P.1546 answers alone: {p1812_refusal}"
    if asked == "p1812":
        return "P.1812 was asked for, and holds here"
    return "P.1812 holds here and follows the ground of this path"
