export { type BenchOptions, generateBenchVolumes } from "./bench.ts";
export { FROZEN, truthDigest } from "./frozen.ts";
export type { GaugeFault } from "./gauges.ts";
export {
  DISTRICT_CENTRE,
  generateStorm,
  type StormOptions,
  type StormSummary,
} from "./generate.ts";
export { TRUTH_RATE_STEP_MM_PER_HOUR } from "./grids.ts";
export { DEMO, PRESETS, SMALL, type StormPreset, TINY } from "./presets.ts";
export type { RadarPlan } from "./radar.ts";
export {
  REPORT_SEEDS,
  TUNING_SEEDS,
  WORLDS,
  type World,
  type WorldSize,
  worldStorm,
} from "./worlds.ts";
