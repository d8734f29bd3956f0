import { InputError } from "@rainreckon/core";
import { expect, test } from "vitest";
import { FOREIGN_TOOLS, outputOf } from "../../test/foreign-tools.ts";
import { ELLIPSOIDS } from "./ellipsoid.ts";
import { parseProjection } from "./projection.ts";

test("every parameter is read, plus signs or not", () => {
  const text =
    "+proj=lcc lat_0=46.5 +lon_0=3 +lat_1=49 +lat_2=44 +x_0=700000 +y_0=6600000 +ellps=GRS80 +units=m +no_defs";
  expect(parseProjection(text)).toMatchObject({
    method: "lcc",
    latitudeOfOriginDeg: 46.5,
    longitudeOfOriginDeg: 3,
    parallel1Deg: 49,
    parallel2Deg: 44,
    falseEastingM: 700000,
    falseNorthingM: 6600000,
    scale: 1,
    ellipsoid: { semiMajorM: 6378137, inverseFlattening: 298.257222101 },
  });
});

// NGA.SIG.0012 (2014), Universal Transverse Mercator (from memory): zone 31 has its central meridian
// at 3° E, zone 1 at 177° W; scale 0.9996, 500 km east, 10,000 km north in the south.
test.each([
  ["+proj=utm +zone=31 +datum=WGS84", 3, 0],
  ["+proj=utm +zone=1 +south +ellps=WGS84", -177, 10_000_000],
])("%s is the transverse Mercator that UTM defines", (text, longitudeOfOriginDeg, falseNorthingM) => {
  expect(parseProjection(text)).toMatchObject({
    method: "tmerc",
    longitudeOfOriginDeg,
    falseNorthingM,
    falseEastingM: 500_000,
    scale: 0.9996,
  });
});

test("a figure of the Earth may be given by its half axes, its flattening or its radius", () => {
  const figure = (words: string) => parseProjection(`+proj=laea ${words}`).ellipsoid;
  expect(figure("+R=6371000")).toEqual({ semiMajorM: 6371000, inverseFlattening: 0 });
  expect(figure("+a=6371000 +b=6371000").inverseFlattening).toBe(0);
  expect(figure("+a=6378137 +rf=298.257")).toEqual({ semiMajorM: 6378137, inverseFlattening: 298.257 });
  // Clarke 1866 by its axes; its flattening as Snyder (1987), USGS Professional Paper 1395, table 1, prints it: 294.98.
  expect(figure("+a=6378206.4 +b=6356583.8").inverseFlattening).toBeCloseTo(294.98, 2);
});

test.each([
  ["+proj=longlat +datum=WGS84", "projected"],
  ["+proj=laea +units=km +ellps=GRS80", "not in metres"],
  ["+proj=tmerc +units=us-ft +datum=NAD83", "not in metres"],
  ["+proj=laea +to_meter=0.3048 +ellps=GRS80", "not in metres"],
  ["+proj=laea +pm=paris +ellps=GRS80", "prime meridian"],
  ["+proj=laea +axis=wsu +ellps=GRS80", "turned axes"],
  ["+proj=laea", "no ellipsoid"],
  ["+proj=laea +ellps=potato", "no ellipsoid"],
  ["+proj=laea +a=6378137", "no ellipsoid"],
  ["+proj=tmerc +datum=potsdam", "shift of datum potsdam"],
  ["+proj=tmerc +ellps=bessel +towgs84=1,2", "is not a shift"],
  ["+proj=laea +lat_0=52N +ellps=GRS80", "+lat_0=52N is not a number"],
  ["+proj=utm +zone=61 +datum=WGS84", "zone"],
  ["EPSG:3035", "no projection"],
])("%s is refused: %s", (text, what) => {
  const parse = () => parseProjection(text);
  expect(parse).toThrow(InputError);
  expect(parse).toThrow(what);
});

test.skipIf(!FOREIGN_TOOLS)("ellipsoids are those of PROJ's own list (RAINRECKON_FOREIGN_TOOLS=1)", () => {
  const list = new Map(
    outputOf("proj", ["-le"])
      .split("\n")
      .map((line) => /^\s*(\S+)\s+a=(\S+)\s+(rf|b)=(\S+)/.exec(line))
      .filter((found) => found !== null)
      .map(([, name, a, kind, value]) => [name, { a: Number(a), kind, value: Number(value) }]),
  );
  for (const [name, ellipsoid] of Object.entries(ELLIPSOIDS)) {
    const listed = list.get(name);
    expect(listed, name).toBeDefined();
    expect(ellipsoid.semiMajorM, name).toBe(listed!.a);
    const semiMinorM = ellipsoid.semiMajorM * (1 - 1 / ellipsoid.inverseFlattening);
    const listedM = listed!.kind === "b" ? listed!.value : listed!.a * (1 - 1 / listed!.value);
    // EPSG and PROJ print some of them to different last digits: 2 mm (Airy modified) is the same figure.
    expect(Math.abs(semiMinorM - listedM), name).toBeLessThan(0.002);
  }
});
