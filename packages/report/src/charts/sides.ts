import type { StepSeries } from "../input.ts";

/** What each side of a hyetograph is called. */
export const SIDE_WORDS: Readonly<Record<StepSeries["role"], string>> = {
  gauge: "gauge",
  radar: "radar",
  adjusted: "adjusted radar",
  "held-out": "adjusted without it",
};
