export { readArealReduction } from "./areal-reduction.ts";
export { readFrequencyTable } from "./frequency-table.ts";
