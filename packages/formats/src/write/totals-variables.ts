import type { AttributeValue } from "./grid-mapping.ts";

/**
 * One float32 variable of the totals file.
 *
 * `over` says which dimensions stand before y and x: none, the time of each interval, or the radars.
 */
export interface TotalsVariable {
  readonly name: string;
  readonly over: "window" | "intervals" | "radars";
  readonly longName: string;
  /** UDUNITS; "1" for shares. */
  readonly units: string;
  /** Only a name that the CF standard name table has, with its modifier where there is one. */
  readonly standardName?: string;
  readonly cellMethods?: string;
  /** Names of variables that belong to this one: its error, its observed share. */
  readonly ancillary?: readonly string[];
  readonly attributes?: Readonly<Record<string, AttributeValue>>;
}

/**
 * CF's name for the depth of water from rain, snow and hail alike: "lwe" is liquid water equivalent.
 * `thickness_of_rainfall_amount` would claim that all of it fell as rain, which no radar knows.
 * CF standard name table (from memory); its canonical unit is m, and mm is of the same dimension.
 */
const DEPTH = "lwe_thickness_of_precipitation_amount";
const SUM_OVER_WINDOW = "area: mean window_end: sum";
const SUM_OVER_INTERVAL = "area: mean time: sum";

/** The variables that a totals file may hold; a run declares those that it can fill. */
export const TOTALS_VARIABLES = {
  radar_total: {
    name: "radar_total",
    over: "window",
    longName: "depth of precipitation from radar alone, over the observed part of the window",
    units: "mm",
    standardName: DEPTH,
    cellMethods: SUM_OVER_WINDOW,
    ancillary: ["observed_fraction"],
  },
  adjusted_total: {
    name: "adjusted_total",
    over: "window",
    longName: "depth of precipitation from radar adjusted to gauges, over the observed part of the window",
    units: "mm",
    standardName: DEPTH,
    cellMethods: SUM_OVER_WINDOW,
    ancillary: ["observed_fraction"],
  },
  adjusted_total_standard_error: {
    name: "adjusted_total_standard_error",
    over: "window",
    longName: "standard error of the adjusted depth",
    units: "mm",
    standardName: `${DEPTH} standard_error`,
  },
  observed_fraction: {
    name: "observed_fraction",
    over: "window",
    longName: "share of the window that at least one radar observed",
    units: "1",
  },
  bridged_fraction: {
    name: "bridged_fraction",
    over: "window",
    longName: "share of the window bridged between scans further apart than usual",
    units: "1",
  },
  edge_fraction: {
    name: "edge_fraction",
    over: "window",
    longName: "share of the window that a scan spoke for before the first or after the last",
    units: "1",
  },
  beam_height: {
    name: "beam_height",
    over: "window",
    longName: "height of the beam centre above mean sea level, weighted by observed time",
    units: "m",
    cellMethods: "window_end: mean (weighted by observed time)",
  },
  cap_share: {
    name: "cap_share",
    over: "window",
    longName: "share of the depth that met the hail cap",
    units: "1",
  },
  unseen_depth: {
    name: "unseen_depth",
    over: "window",
    longName: "depth that an echo just below detection would have added over the time without rain",
    units: "mm",
    cellMethods: SUM_OVER_WINDOW,
  },
  radar_share: {
    name: "radar_share",
    over: "radars",
    longName: "share of the observed time that each radar spoke for, by blend weight",
    units: "1",
  },
  radar_depth: {
    name: "radar_depth",
    over: "intervals",
    longName: "depth of precipitation from radar alone, by interval",
    units: "mm",
    standardName: DEPTH,
    cellMethods: SUM_OVER_INTERVAL,
  },
  adjusted_depth: {
    name: "adjusted_depth",
    over: "intervals",
    longName: "depth of precipitation from radar adjusted to gauges, by interval",
    units: "mm",
    standardName: DEPTH,
    cellMethods: SUM_OVER_INTERVAL,
  },
} as const satisfies Readonly<Record<string, TotalsVariable>>;
