import { expect, test } from "vitest";
import { projectionWords } from "./projection-words.ts";

// Names of projections and their short forms: PROJ documentation, "Projections".
test.each([
  ["EPSG:3035", "EPSG:3035"],
  [
    "+proj=laea +lat_0=52.5 +lon_0=-3 +ellps=GRS80 +units=m",
    "a Lambert azimuthal equal-area projection about 52.5° N, 3° W",
  ],
  ["+proj=utm +zone=33 +datum=WGS84", "UTM zone 33"],
  ["+proj=lcc +lat_1=45 +lon_0=3", "a Lambert conformal conic projection"],
  ["+proj=laea +lat_0=north +lon_0=3", "a Lambert azimuthal equal-area projection"],
  ['PROJCS["anything",GEOGCS[]]', "the map's own projection"],
])("%s reads as %s", (crs, words) => {
  expect(projectionWords(crs)).toBe(words);
});
