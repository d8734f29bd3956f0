export { sniffTerrain, type TerrainGuess } from "./sniff-terrain.ts";
export { readTerrain } from "./terrain-grid.ts";
export { readTerrainProfile } from "./terrain-profile.ts";
