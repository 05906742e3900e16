/** The one place where a figure is held against a limit; see fieldapp/reckoning/limits.py. */

export const DEPTH_TOLERANCE_MM = 0.05;
export const RELATIVE_TOLERANCE = 1e-9;

/** The least depth that still meets a limit. [mm] */
export const leastMeetingMm = (limitMm) => limitMm - DEPTH_TOLERANCE_MM;

/** True where a depth reaches a limit. [mm] */
export const depthMeets = (depthMm, limitMm) => depthMm >= leastMeetingMm(limitMm);

/** True where a depth passes a greatest depth. [mm] */
export const depthOver = (depthMm, limitMm) => depthMm > limitMm + DEPTH_TOLERANCE_MM;

/** True where a figure other than a depth reaches a lower limit. */
export const atLeast = (value, limit) => value >= limit - Math.abs(limit) * RELATIVE_TOLERANCE;

/** True where a figure other than a depth keeps to an upper limit. */
export const atMost = (value, limit) => value <= limit + Math.abs(limit) * RELATIVE_TOLERANCE;
