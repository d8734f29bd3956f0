import { SCREENS, type Screen } from "../polar-echo.ts";

/** How a sweep is screened. */
export interface ScreeningSettings {
  /** Screens that are not asked: they neither take a gate nor support another screen. */
  readonly off: readonly Screen[];
  /** What becomes of a screened gate: not observed, or the mean of the gates around it. */
  readonly fill: "none" | "neighbours";
}

export const DEFAULT_SCREENING: ScreeningSettings = { off: [], fill: "neighbours" };

/** What screening did to one sweep, and what it could not do. */
export interface ScreeningReport {
  /** Gates with echo, as the file has them. */
  readonly echoGates: number;
  readonly screenedGates: number;
  /** Of the screened gates, those that were filled; the rest is not observed. */
  readonly filledGates: number;
  /** Gates marked as possible side-lobe echo, which are kept. */
  readonly sideLobeGates: number;
  /** Shape [SCREENS.length]: gates that each screen holds against, a gate counted under each of them. */
  readonly gatesByScreen: Uint32Array;
  /** The same with a gate counted once, under the first of its screens: the sum is `screenedGates`. */
  readonly gatesByFirstScreen: Uint32Array;
  /** Screens that were asked and had nothing to judge by, in the order of SCREENS. */
  readonly couldNotRun: readonly { readonly screen: Screen; readonly lacking: string }[];
}

/** The number of the lowest bit that is set: the first screen of a gate. `bits` is not 0. */
export function firstScreenOf(bits: number): Screen {
  return SCREENS[31 - Math.clz32(bits & -bits)] as Screen;
}
