/** The kinds of records and the fields of their bodies: the same table as fieldapp/records/kinds.py, in the same order. */

import { atLeast } from "../reckoning/limits.js";
import { each, fields, flag, instant, isObject, listOf, number, oneOf, pattern, plain, shown, text, whole } from "./fields.js";

export const DEEPEST_MM = 1000;
export const UUID = /^[0-9a-f]{8}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{12}$/;

const key = pattern(UUID, "a UUID in lower case");
const digest = pattern(/^[0-9a-f]{64}$/, "a SHA-256 in 64 lower-case hex digits");
const name = text(1, 200);
const depth = number({ low: 0, high: DEEPEST_MM });
const LEAST = 1e-6;
const deep = number({ low: LEAST, high: DEEPEST_MM });
const length = number({ low: LEAST, high: 100_000 });
const positive = number({ low: LEAST, high: 1e9 });
const zeroUp = number({ low: 0 });
const share = number({ low: 0, high: 1 });

const purposes = oneOf("inspection", "self-check");

const problem = (field, found, allowed) => ({ field, found, allowed });

function foamResistance(body) {
  const perMetre = body.rsi_per_m ?? null;
  const table = body.table ?? null;
  if ((perMetre === null) === (table === null)) {
    return problem("rsi_per_m", table?.length ? "both" : "nothing", "either rsi_per_m or a table");
  }
  return table === null ? null : risingTable(table);
}

function risingTable(table) {
  let depthBefore = 0;
  let rsiBefore = 0;
  for (let place = 0; place < table.length; place += 1) {
    const row = table[place];
    if (row.length !== 2 || !(row[0] > 0 && row[0] <= DEEPEST_MM) || row[1] <= 0) {
      const allowed = `[depth_mm, rsi], both over 0, depths to ${plain(DEEPEST_MM)}`;
      return problem(`table[${place}]`, shown(row), allowed);
    }
    if (row[0] <= depthBefore || row[1] < rsiBefore) {
      const allowed = `a depth over ${plain(depthBefore)} with at least the resistance ${plain(rsiBefore)}`;
      return problem(`table[${place}]`, shown(row), allowed);
    }
    [depthBefore, rsiBefore] = row;
  }
  return null;
}

function densityLimits(body) {
  const low = body.min ?? null;
  const high = body.max ?? null;
  return low !== null && high !== null && high < low ? problem("max", shown(high), `at least min, ${plain(low)}`) : null;
}

function specOwes(body) {
  if (body.basis !== "average-with-floor") return null;
  const floor = body.floor_mm ?? null;
  if (floor === null) {
    return problem("floor_mm", "nothing", "the least depth of a single point, since the basis names a floor");
  }
  return floor > body.depth_mm ? problem("floor_mm", shown(floor), `at most depth_mm, ${plain(body.depth_mm)}`) : null;
}

const VAPOUR_NEEDS = { depth: "depth_mm", permeance: "perm_ng", separate: "retarder", none: "reason" };

function vapourOwes(body) {
  const needs = VAPOUR_NEEDS[body.rule];
  return body[needs] == null ? problem(needs, "nothing", `a value, since the rule is ${body.rule}`) : null;
}

const probeOwes = (body) =>
  body.direction === "plumb" && body.pitch_deg == null
    ? problem("pitch_deg", "nothing", "the pitch, since the probe is held plumb")
    : null;

const layerOwes = (body) =>
  body.foam !== true && body.name == null
    ? problem("name", "nothing", 'a name, or {"foam": true} where the foam stands')
    : null;

/** Area of a bay without its opening. [m2] */
export const bayAreaM2 = (body) =>
  (body.area_m2 ?? (body.width_mm * body.height_mm) / 1e6) - (body.opening_m2 ?? 0);

function bayOwes(body) {
  const opening = body.opening_m2 ?? 0;
  const gross = bayAreaM2({ ...body, opening_m2: null });
  if (atLeast(opening, gross)) return problem("opening_m2", shown(opening), `under the bay's area, ${plain(gross)}`);
  if (body.rows * body.cols > 10_000) return problem("rows", shown(body.rows), "at most 10000 points in a bay");
  for (const [field, count, along] of [
    ["rows_at_mm", "rows", "height_mm"],
    ["cols_at_mm", "cols", "width_mm"],
  ]) {
    const found = body[field] == null ? null : positions(field, body[field], body[count], body[along]);
    if (found) return found;
  }
  return null;
}

function positions(field, atMm, count, lengthMm) {
  if (atMm.length !== count) return problem(field, shown(atMm), `${count} positions, one for each point`);
  let before = -1;
  for (let place = 0; place < atMm.length; place += 1) {
    const position = atMm[place];
    if (position <= before || !(position >= 0 && position <= lengthMm)) {
      const start = before < 0 ? "0" : `over ${plain(before)}`;
      return problem(`${field}[${place}]`, shown(position), `rising, ${start} to ${plain(lengthMm)}`);
    }
    before = position;
  }
  return null;
}

function readingOwes(body) {
  const found = body.depth_mm ?? null;
  if ((found === null) !== ((body.blocked ?? null) === null)) return null;
  const allowed = `a depth, 0 to ${plain(DEEPEST_MM)}, or blocked with its reason; not both`;
  return problem("depth_mm", found === null ? "nothing" : shown(found), allowed);
}

export const CORE_SIZES = {
  cylinder: ["diameter_mm", "length_mm"],
  prism: ["width_mm", "length_mm", "depth_mm"],
  displacement: ["volume_ml"],
};

function coreOwes(body) {
  const missing = CORE_SIZES[body.method].find((size) => body[size] == null);
  return missing ? problem(missing, "nothing", `a size over 0, since the method is ${body.method}`) : null;
}

const bayOrSurface = (body) =>
  body.bay == null && body.surface == null ? problem("bay", "nothing", "the key of a bay or a surface") : null;

const pullOwes = (body) =>
  body.kpa == null && body.by_hand == null ? problem("kpa", "nothing", "kpa, or by_hand") : null;

const point = { row: whole(0), col: whole(0) };
const temperature = number({ low: -80, high: 80 });

/** For each kind: whether it describes a thing, and its body. */
export const KINDS = {
  job: {
    describes: true,
    body: fields(
      { key, name, units: oneOf("ip", "si") },
      {
        ...each(text(), "site", "client", "contractor", "tz", "code", "permit_no", "project_no", "spec_section"),
        ...each(text(), "submittal_no", "engaged_by", "note"),
        climate_zone: oneOf(
          ..."1A 1B 2A 2B 3A 3B 3C 4A 4B 4C 5A 5B 5C 6A 6B 7 8".split(" "),
        ),
        design: fields({}, { ...each(temperature, "indoor_c", "outdoor_c"), indoor_rh: share, outdoor_rh: share }),
      },
    ),
  },
  place: { describes: true, body: fields({ key, name }, { order: number() }) },
  foam: {
    describes: true,
    body: fields(
      {
        key,
        name,
        cell: oneOf("closed", "open"),
        resistance: fields({}, { rsi_per_m: positive, table: listOf(listOf(number(), 2, 2), 1) }, foamResistance),
      },
      {
        permeability_ng_m: positive,
        density_kg_m3: fields({}, { nominal: positive, min: positive, max: positive }, densityLimits),
        max_pass_mm: positive,
        max_depth_mm: positive,
        ...each(zeroUp, "min_pass_mm", "pass_wait_min", "reentry_h"),
        loss_share: number({ low: 0, high: 0.9 }),
        ...each(text(), "evaluation_report", "source"),
      },
    ),
  },
  surface: {
    describes: true,
    body: fields(
      {
        key,
        name,
        assembly: oneOf("wall", "sloped-roof", "attic-floor", "rim", "floor", "foundation"),
        foam: key,
        bays_total: whole(0, 1_000_000),
        spec: fields(
          { depth_mm: deep },
          {
            basis: oneOf("minimum", "average-with-floor", "average"),
            floor_mm: depth,
            rsi: positive,
            r_basis: oneOf("delivered", "nominal"),
            under_area_share_max: share,
            bays_share_min: share,
            cores_min: whole(0, 10_000),
          },
          specOwes,
        ),
        vapour: fields(
          { rule: oneOf("depth", "permeance", "separate", "none") },
          {
            depth_mm: deep,
            measure: oneOf("lowest", "bay-mean"),
            by_sample: flag(),
            perm_ng: zeroUp,
            retarder: fields({ name, perm_ng: zeroUp, side: oneOf("inside", "outside") }),
            reason: text(1),
            accepted_by: text(),
          },
          vapourOwes,
        ),
      },
      {
        place: key,
        chosen: oneOf("all", "random", "every-kth", "where-it-looked-thin"),
        ...each(text(), "numbered_from", "substrate", "max_depth_reason"),
        probe: fields(
          {},
          {
            kind: text(),
            graduation_mm: positive,
            direction: oneOf("square", "plumb"),
            pitch_deg: number({ low: 0, high: 90, below: true }),
          },
          probeOwes,
        ),
        max_depth_mm: positive,
        cover: fields({}, each(text(), "kind", "product", "note")),
        framing: fields(
          { material: oneOf("wood", "steel", "none") },
          { spacing_mm: positive, depth_mm: positive, share },
        ),
        layers: listOf(
          fields(
            {},
            {
              name,
              foam: flag(),
              air_permeable: flag(),
              ...each(zeroUp, "rsi", "perm_ng", "permeability_ng_m", "depth_mm"),
            },
            layerOwes,
          ),
          0,
          100,
        ),
        ...each(zeroUp, "film_in_rsi", "film_out_rsi"),
      },
    ),
  },
  bay: {
    describes: true,
    body: fields(
      {
        key,
        surface: key,
        label: text(1, 60),
        order: number(),
        width_mm: length,
        height_mm: length,
        rows: whole(1, 1000),
        cols: whole(1, 1000),
      },
      {
        opening_m2: zeroUp,
        area_m2: positive,
        rows_at_mm: listOf(zeroUp, 1),
        cols_at_mm: listOf(zeroUp, 1),
      },
      bayOwes,
    ),
  },
  reading: {
    body: fields(
      { bay: key, row: whole(0), col: whole(0), round: whole(1, 1000), purpose: purposes },
      {
        depth_mm: depth,
        blocked: oneOf("pipe-or-box", "no-access", "already-covered", "unsafe"),
        measured: oneOf("probe", "face-gap"),
        ...each(text(), "entered", "text"),
      },
      readingOwes,
    ),
  },
  "low-spot": {
    body: fields(
      {
        bay: key,
        round: whole(1, 1000),
        purpose: purposes,
        depth_mm: depth,
        where: oneOf("stud-edge", "plate", "corner", "behind-pipe", "at-box", "other"),
      },
      { ...each(number(), "x_mm", "y_mm"), entered: text() },
    ),
  },
  "touch-up": { body: fields({ bay: key, round: whole(2, 1000) }, { text: text() }) },
  core: {
    body: fields(
      { bay: key, method: oneOf("cylinder", "prism", "displacement"), mass_g: positive },
      {
        ...point,
        label: text(0, 60),
        ...each(positive, "diameter_mm", "length_mm", "width_mm", "depth_mm", "volume_ml"),
        ...each(zeroUp, "scale_step_g", "calliper_step_mm", "foam_age_h"),
        skin: oneOf("with", "without"),
        hole_filled: flag(),
        note: text(),
      },
      coreOwes,
    ),
  },
  pull: {
    body: fields(
      { bay: key },
      { kpa: zeroUp, broke: oneOf("in-foam", "at-substrate", "between-lifts"), note: text() },
      pullOwes,
    ),
  },
  photo: {
    body: fields(
      {
        sha256: digest,
        media_type: text(1, 100),
        bytes: whole(1),
        width: whole(1, 100_000),
        height: whole(1, 100_000),
      },
      {
        caption: text(),
        shows: oneOf("probe-scale", "before", "after", "substrate", "label", "overview"),
        bay: key,
        surface: key,
        about: key,
        ...point,
      },
    ),
  },
  deficiency: {
    body: fields(
      {
        sort: oneOf(
          ...(
            "void gap pulled-away shrinkage blister scorched brittle-or-dark soft-or-sticky odour lift-separated " +
            "cracked missed scooped overspray vent-path-closed foam-on-heat-source box-filled other"
          ).split(" "),
        ),
        severity: oneOf("stop", "repair", "note"),
      },
      { bay: key, surface: key, text: text() },
      bayOrSurface,
    ),
  },
  repair: { body: fields({ deficiency: key }, { text: text() }) },
  acceptance: { body: fields({ repair: key, role: name }, { text: text() }) },
  conditions: {
    body: fields(
      {},
      {
        surface: key,
        bay: key,
        ...each(number({ low: -80, high: 100 }), "air_c", "substrate_c"),
        rh: share,
        wood_mc: listOf(share),
        note: text(),
      },
    ),
  },
  spray: {
    body: fields(
      { surfaces: listOf(key, 1), foam: key },
      {
        started: instant(),
        finished: instant(),
        ...each(text(), "lot_a", "lot_b", "ventilation", "note"),
        ...each(number({ low: -80, high: 200 }), "drum_c", "hose_c", "heater_a_c", "heater_b_c"),
        ...each(zeroUp, "pressure_a_kpa", "pressure_b_kpa", "kg"),
        passes: whole(0, 1000),
        masked: listOf(text()),
      },
    ),
  },
  covered: { body: fields({ bays: listOf(key, 1) }, { text: text() }) },
  visit: { body: fields({}, { ...each(text(), "asked", "not_inspected", "note"), present: listOf(text()) }) },
  objection: { body: fields({ about: key, text: text(1) }) },
  signature: {
    body: fields(
      {
        role: oneOf("inspector", "applicator", "witness", "received"),
        name,
        statement: text(1),
        strokes: listOf(listOf(listOf(share, 2, 2))),
        covers: digest,
      },
      { credential: text(), surfaces: listOf(key, 1) },
    ),
  },
  withdrawal: { body: fields({ record: key, reason: text(1) }) },
};

const removed = fields({ key, removed: flag() });

/** A kind by its name; undefined for one that is not known here. */
export const kindOf = (kind) => (Object.hasOwn(KINDS, kind) ? KINDS[kind] : undefined);

/** What is wrong with the body of a record of that kind; null for a good one and for kinds not known here. */
export function checkBody(kind, body) {
  if (!isObject(body)) return problem("body", shown(body), "an object with named fields");
  const known = kindOf(kind);
  if (known === undefined) return null;
  if (known.describes && body.removed != null) {
    return body.removed === true ? removed(body, "") : (flag()(body.removed, "removed") ?? known.body(body, ""));
  }
  return known.body(body, "");
}
