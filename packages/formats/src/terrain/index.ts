export { readTerrainProfile } from "./terrain-profile.ts";
