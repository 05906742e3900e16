/** What descriptions and cores say, as the reckoning takes it; see fieldapp/records/described.py. */

import { cylinderM3, prismM3 } from "../reckoning/density.js";
import { PerMetre, Table } from "../reckoning/resistance.js";
import { pointAreasM2, stripShares } from "../reckoning/strips.js";
import { bayAreaM2 } from "./kinds.js";

/** Areas of a bay's points, row by row. [m2] */
export const describedAreasM2 = (body) =>
  pointAreasM2(
    bayAreaM2(body),
    stripShares(body.rows_at_mm, body.rows, body.height_mm),
    stripShares(body.cols_at_mm, body.cols, body.width_mm),
  );

/** A foam's values from its description. */
export function describedFoam(foam) {
  const { body } = foam;
  const density = body.density_kg_m3 ?? {};
  const { table } = body.resistance;
  return {
    key: foam.key,
    name: foam.name,
    cell: body.cell,
    resistance: table != null ? new Table(table) : new PerMetre(body.resistance.rsi_per_m),
    permeabilityNgM: body.permeability_ng_m ?? null,
    densityNominalKgM3: density.nominal ?? null,
    densityMinKgM3: density.min ?? null,
    densityMaxKgM3: density.max ?? null,
    maxPassMm: body.max_pass_mm ?? null,
    minPassMm: body.min_pass_mm ?? null,
    passWaitMin: body.pass_wait_min ?? null,
    maxDepthMm: body.max_depth_mm ?? null,
    reentryH: body.reentry_h ?? null,
    lossShare: body.loss_share ?? null,
    source: body.source ?? null,
  };
}

/** What the contract asks. */
export const describedSpec = (body) => ({
  depthMm: body.depth_mm,
  basis: body.basis ?? null,
  floorMm: body.floor_mm ?? null,
  rsi: body.rsi ?? null,
  rBasis: body.r_basis || "delivered",
  underAreaShareMax: body.under_area_share_max ?? null,
  baysShareMin: body.bays_share_min ?? 1.0,
  coresMin: body.cores_min ?? 0,
});

/** The vapour rule. */
export const describedVapour = (body) => ({
  rule: body.rule,
  depthMm: body.depth_mm ?? null,
  measure: body.measure || "lowest",
  bySample: body.by_sample === true,
  permNg: body.perm_ng ?? null,
  retarderName: body.retarder?.name ?? null,
  retarderPermNg: body.retarder?.perm_ng ?? null,
  retarderSide: body.retarder?.side ?? null,
  reason: body.reason ?? null,
  acceptedBy: body.accepted_by ?? null,
});

/** The framing of a surface that names any. */
export const describedFraming = (body) => ({
  material: body.material,
  spacingMm: body.spacing_mm ?? null,
  depthMm: body.depth_mm ?? null,
  share: body.share ?? null,
});

/** A core sample from its record. */
export function describedCore(record, bay) {
  const { body } = record;
  let sizesMm = [];
  let volumeM3;
  if (body.method === "cylinder") {
    volumeM3 = cylinderM3(body.diameter_mm, body.length_mm);
    sizesMm = [
      [body.diameter_mm, 2],
      [body.length_mm, 1],
    ];
  } else if (body.method === "prism") {
    volumeM3 = prismM3(body.width_mm, body.length_mm, body.depth_mm);
    sizesMm = [body.width_mm, body.length_mm, body.depth_mm].map((size) => [size, 1]);
  } else {
    volumeM3 = body.volume_ml * 1e-6;
  }
  return {
    record: record.id,
    bay: bay.key,
    bayLabel: bay.name,
    label: body.label || "",
    massG: body.mass_g,
    volumeM3,
    sizesMm,
    scaleStepG: body.scale_step_g ?? null,
    calliperStepMm: body.calliper_step_mm ?? null,
    withSkin: body.skin === "with",
  };
}
