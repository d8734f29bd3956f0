export { readTerrain } from "./terrain-grid.ts";
export { readTerrainProfile } from "./terrain-profile.ts";
