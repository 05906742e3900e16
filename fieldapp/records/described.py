"""What descriptions and cores say, as the reckoning takes it: typed values, None where nobody gave any."""

from collections.abc import Mapping
from typing import Any

from fieldapp.reckoning.density import cylinder_m3, prism_m3
from fieldapp.reckoning.inputs import Core, Foam, Framing, Spec, Vapour
from fieldapp.reckoning.resistance import PerMetre, Resistance, Table
from fieldapp.reckoning.strips import point_areas_m2, strip_shares
from fieldapp.records.job import Thing
from fieldapp.records.kinds import bay_area_m2
from fieldapp.records.record import Record


def described_areas_m2(body: Mapping[str, Any]) -> tuple[float, ...]:
    """Areas of a bay's points, row by row. [m2]"""
    rows = strip_shares(body.get("rows_at_mm"), int(body["rows"]), body["height_mm"])
    cols = strip_shares(body.get("cols_at_mm"), int(body["cols"]), body["width_mm"])
    return point_areas_m2(bay_area_m2(body), rows, cols)


def described_foam(foam: Thing) -> Foam:
    """A foam's values from its description."""
    body = foam.body
    density = body.get("density_kg_m3") or {}
    table = body["resistance"].get("table")
    resistance: Resistance
    if table is not None:
        resistance = Table(tuple((float(depth), float(rsi)) for depth, rsi in table))
    else:
        resistance = PerMetre(float(body["resistance"]["rsi_per_m"]))
    return Foam(
        key=foam.key,
        name=foam.name,
        cell=body["cell"],
        resistance=resistance,
        permeability_ng_m=body.get("permeability_ng_m"),
        density_nominal_kg_m3=density.get("nominal"),
        density_min_kg_m3=density.get("min"),
        density_max_kg_m3=density.get("max"),
        max_pass_mm=body.get("max_pass_mm"),
        min_pass_mm=body.get("min_pass_mm"),
        pass_wait_min=body.get("pass_wait_min"),
        max_depth_mm=body.get("max_depth_mm"),
        reentry_h=body.get("reentry_h"),
        loss_share=body.get("loss_share"),
        source=body.get("source"),
    )


def described_spec(body: Mapping[str, Any]) -> Spec:
    """What the contract asks, from a surface's `spec`."""
    share_min, cores_min = body.get("bays_share_min"), body.get("cores_min")
    return Spec(
        depth_mm=body["depth_mm"],
        basis=body.get("basis"),
        floor_mm=body.get("floor_mm"),
        rsi=body.get("rsi"),
        r_basis=body.get("r_basis") or "delivered",
        under_area_share_max=body.get("under_area_share_max"),
        bays_share_min=1.0 if share_min is None else float(share_min),
        cores_min=int(cores_min or 0),
    )


def described_vapour(body: Mapping[str, Any]) -> Vapour:
    """The vapour rule, from a surface's `vapour`."""
    retarder = body.get("retarder") or {}
    return Vapour(
        rule=body["rule"],
        depth_mm=body.get("depth_mm"),
        measure=body.get("measure") or "lowest",
        by_sample=bool(body.get("by_sample")),
        perm_ng=body.get("perm_ng"),
        retarder_name=retarder.get("name"),
        retarder_perm_ng=retarder.get("perm_ng"),
        retarder_side=retarder.get("side"),
        reason=body.get("reason"),
        accepted_by=body.get("accepted_by"),
    )


def described_framing(body: Mapping[str, Any] | None) -> Framing | None:
    """The framing, where a surface names any."""
    if body is None:
        return None
    return Framing(body["material"], body.get("spacing_mm"), body.get("depth_mm"), body.get("share"))


def described_core(record: Record, bay: Thing) -> Core:
    """A core sample from its record."""
    body = record.body
    sizes: tuple[tuple[float, int], ...] = ()
    if body["method"] == "cylinder":
        volume = cylinder_m3(body["diameter_mm"], body["length_mm"])
        sizes = ((body["diameter_mm"], 2), (body["length_mm"], 1))
    elif body["method"] == "prism":
        volume = prism_m3(body["width_mm"], body["length_mm"], body["depth_mm"])
        sizes = ((body["width_mm"], 1), (body["length_mm"], 1), (body["depth_mm"], 1))
    else:
        volume = body["volume_ml"] * 1e-6
    return Core(
        record=record.id,
        bay=bay.key,
        bay_label=bay.name,
        label=body.get("label") or "",
        mass_g=body["mass_g"],
        volume_m3=volume,
        sizes_mm=sizes,
        scale_step_g=body.get("scale_step_g"),
        calliper_step_mm=body.get("calliper_step_mm"),
        with_skin=body.get("skin") == "with",
    )
