/** Exact constants between the units that records hold (SI) and the units that people in North America read.
 *
 * The same names and values as fieldapp/reckoning/units.py, which gives their sources.
 */

export const MM_PER_INCH = 25.4;
export const M_PER_FOOT = 0.3048;
export const M2_PER_FT2 = M_PER_FOOT * M_PER_FOOT;
export const KG_PER_LB = 0.45359237;
export const KG_PER_GRAIN = KG_PER_LB / 7000.0;
export const J_PER_BTU = 1055.05585262;
export const PA_PER_INHG = 13595.1 * 9.80665 * 0.0254;

/** 1 h ft2 F/Btu in m2K/W. */
export const RSI_PER_R = (3600.0 * M2_PER_FT2) / (J_PER_BTU * 1.8);
/** 1 perm in ng/(Pa s m2). */
export const NG_PER_PERM = (KG_PER_GRAIN * 1e12) / (3600.0 * M2_PER_FT2 * PA_PER_INHG);
/** 1 lb/ft3 in kg/m3. */
export const KG_M3_PER_PCF = KG_PER_LB / M_PER_FOOT ** 3;
/** 1 board foot (1 ft2 x 1 in) in m3. */
export const M3_PER_BOARD_FOOT = M2_PER_FT2 * 0.0254;
