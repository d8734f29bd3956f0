import type { MethodName } from "@rainreckon/adjustment";

/**
 * Worlds in which the error that the corrected radar keeps varies in space, and why; written down before any of them
 * was measured. In the others it is the same everywhere, or what there is of it is scatter.
 */
export const VARIES_IN_SPACE: Readonly<Record<string, string>> = {
  "bright-band": "the melting layer is corrected from its mean profile, and what is left grows with range",
  "blind-zone": "attenuation behind a line of showers is given back for one radar and not seen by the other",
  "blocked-sector": "one sector is corrected for a part of the beam, or taken from the beam above",
  "calibration-low": "one radar reads low and the other true: what is wrong follows the share of each",
  "calibration-high": "one radar reads high and the other true: what is wrong follows the share of each",
  mixed: "all of these at once",
  "mixed-without-attenuation": "all of these but attenuation",
  "mixed-without-false-echo": "all of these without false echo",
  "mixed-without-bright-band": "all of these but the melting layer",
  "mixed-without-blockage": "all of these but blockage",
  "mixed-without-hail": "all of these without hail",
};

/** The error is the same everywhere, is scatter, or is that of gauges. */
const ELSEWHERE = [
  "calibration-true",
  "warm-rain",
  "false-echo",
  "hail",
  "mixed-without-calibration",
  "gauge-faults",
  "network-in-inches",
  "network-clock-late",
  "cloudburst",
] as const;

export const ADJUSTMENT_WORLDS: readonly string[] = [...Object.keys(VARIES_IN_SPACE), ...ELSEWHERE];

/** What every other way is held against, and what no adjustment may be worse than. */
export const YARDSTICK: MethodName = "mean-field-bias";
export const GAUGES_ALONE: MethodName = "gauges-alone";
