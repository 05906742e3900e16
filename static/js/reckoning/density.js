/** Density of core samples; formulas and sources in fieldapp/reckoning/density.py. */

/** [m3] */
export const cylinderM3 = (diameterMm, lengthMm) => (Math.PI / 4.0) * diameterMm * diameterMm * lengthMm * 1e-9;

/** [m3] */
export const prismM3 = (widthMm, lengthMm, depthMm) => widthMm * lengthMm * depthMm * 1e-9;

/** [kg/m3] */
export const densityKgM3 = (massG, volumeM3) => massG / 1000.0 / volumeM3;

/** What half a step of scale and calliper can do to a density. sizesMm: [length, power] each. [kg/m3] */
export function plusMinusKgM3(density, massG, scaleStepG, sizesMm, calliperStepMm) {
  let total = (scaleStepG / 2.0 / massG) ** 2;
  for (const [sizeMm, power] of sizesMm) total += ((power * calliperStepMm) / 2.0 / sizeMm) ** 2;
  return density * Math.sqrt(total);
}
