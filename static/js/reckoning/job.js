/** One job in, one result out: no clock, no network, no randomness. This folder is pure: it may not touch the page, storage,
 * network, clock or chance, and imports nothing from outside itself.
 */

import { limitsOfAgreement } from "./sampling.js";
import { reckonSurface, worst } from "./surface.js";
import { Wording } from "./wording.js";

/** Reckon a whole job as counted; the shape is that of `bayreckon reckon --json`, but for refused and digest. */
export function reckon(job) {
  const words = new Wording(job.units);
  const surfaces = job.surfaces.map((surface) => reckonSurface(surface, job.climateZone, words));
  return {
    format: 1,
    job: { key: job.key, name: job.name, units: job.units },
    purpose: job.purpose,
    result: worst(surfaces.map((surface) => surface.result)),
    agreement: limitsOfAgreement(job.pairDifferencesMm),
    places: job.places.map((place) => ({
      key: place.key,
      name: place.name,
      result: worst(surfaces.filter((surface) => surface.place === place.key).map((surface) => surface.result)),
    })),
    surfaces,
  };
}
