import { execFileSync } from "node:child_process";
import { describe, expect, test } from "vitest";
import { checkValue, differences, inputNumber } from "../../published/index.ts";
import { equalAreaPlane, travel } from "./earth.ts";

describe("Lambert azimuthal equal-area", () => {
  // Snyder (1987), USGS Professional Paper 1395, p. 333-334: Clarke 1866 ellipsoid, centre 40N 100W, point
  // 30N 110W. Printed to 0.1 m (from memory; the comparison with PROJ below is independent of it).
  test("Snyder's worked example on the Clarke 1866 ellipsoid, both ways", () => {
    const plane = equalAreaPlane({ lonDeg: -100, latDeg: 40 }, { radiusM: 6378206.4, e2: 0.00676866 });
    const point = plane.toPlane({ lonDeg: -110, latDeg: 30 });
    expect(Math.abs(point.xKm * 1000 - -965932.1)).toBeLessThan(0.1);
    expect(Math.abs(point.yKm * 1000 - -1056814.9)).toBeLessThan(0.1);
    const back = plane.toPlace(point.xKm, point.yKm);
    expect(Math.abs(back.lonDeg - -110)).toBeLessThan(1e-9);
    expect(Math.abs(back.latDeg - 30)).toBeLessThan(1e-9);
  });

  test("the centre maps to the origin and back", () => {
    const centre = { lonDeg: 3, latDeg: 52.5 };
    const plane = equalAreaPlane(centre);
    expect(plane.toPlane(centre).xKm).toBeCloseTo(0, 9);
    expect(plane.toPlane(centre).yKm).toBeCloseTo(0, 9);
    expect(plane.toPlace(0, 0)).toEqual(centre);
  });

  test.skipIf(process.env.RAINRECKON_FOREIGN_TOOLS !== "1")(
    "agrees with PROJ's cs2cs to a centimetre (skipped unless RAINRECKON_FOREIGN_TOOLS=1)",
    () => {
      const plane = equalAreaPlane({ lonDeg: 3, latDeg: 52.5 });
      const places = [
        [1.7, 51.75],
        [4.3, 53.3],
        [3.4, 52.8],
        [0.5, 54],
      ] as const;
      const input = places.map(([lon, lat]) => `${lon} ${lat}`).join("\n");
      const args = [
        "-f",
        "%.4f",
        "+proj=longlat",
        "+datum=WGS84",
        "+to",
        ...plane.proj.split(" ").filter((word) => word !== "+type=crs"),
      ];
      const lines = execFileSync("cs2cs", args, { input, encoding: "utf8" }).trim().split("\n");
      places.forEach(([lonDeg, latDeg], i) => {
        const [x, y] = lines[i]!.split(/\s+/).map(Number);
        const ours = plane.toPlane({ lonDeg, latDeg });
        expect(Math.abs(ours.xKm * 1000 - x!)).toBeLessThan(0.01);
        expect(Math.abs(ours.yKm * 1000 - y!)).toBeLessThan(0.01);
      });
    },
  );
});

// Positions computed independently of this code; sources in test-data/published/radar-physics.json.
test.each(["mid-europe", "us-plains", "melbourne-lat", "equator", "nordic", "due-north", "sw"])(
  "geodesic from the site: %s",
  (name) => {
    const lon = checkValue(`geod-${name}-lon`);
    const place = travel(
      { lonDeg: inputNumber(lon, "site_lon_deg"), latDeg: inputNumber(lon, "site_lat_deg") },
      inputNumber(lon, "azimuth_deg"),
      inputNumber(lon, "surface_distance_m"),
    );
    expect(differences(lon, place.lonDeg)).toEqual([]);
    expect(differences(checkValue(`geod-${name}-lat`), place.latDeg)).toEqual([]);
  },
);
