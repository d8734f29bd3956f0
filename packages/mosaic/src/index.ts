export { type BlendWeightInput, blendWeight, trustIn } from "./blend-weight.ts";
export { geodesicDirect, geodesicInverse } from "./geodesic.ts";
export { gridLookup, type SourceCells } from "./grid-lookup.ts";
export { headlinePositions } from "./headline-positions.ts";
export {
  OVERLAP_SETTINGS,
  OverlapSamples,
  type OverlapSettings,
  type OverlapSweep,
} from "./overlap-samples.ts";
export { MAX_GRID_CELLS, planGrid } from "./plan-grid.ts";
export {
  type BlockedSector,
  type LookupRules,
  type PolarLookup,
  polarLookup,
  type SweepGeometry,
} from "./polar-lookup.ts";
export { projectArea } from "./project-area.ts";
export { type Projection, projection, projStringOf } from "./projection.ts";
export { rainTypeOfGates } from "./rain-type.ts";
export {
  type CellLookup,
  type CompanionKind,
  type CompanionValue,
  type GateRates,
  type RateLayer,
  RateLayerBuilder,
  type VariantRates,
} from "./rate-layer.ts";
export { type SiteCells, siteCells } from "./site-cells.ts";
export {
  type HeightAt,
  TERRAIN_SAMPLING,
  type TerrainSampling,
  terrainAlongRays,
  terrainHeights,
} from "./terrain-heights.ts";
