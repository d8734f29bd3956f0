import path from "node:path";
import geodesicLibrary from "geographiclib-geodesic";
import { area, box, planText, RADAR, writeAreas } from "./even-rain.ts";
import { RAYS, SWEEP_SECONDS, storedDbz, writeVolume } from "./odim-scans.ts";
import { writeIn } from "./total-kit.ts";

// Two hours of rain that is even within each of twelve sectors and changes from scan to scan, and gauges that measure
// what a planted relation, not the plan's, makes of it.
export const PLANTED = { a: 300, b: 1.4 };
const FROM = Date.UTC(2031, 5, 1, 12);
const SECTORS = 12;
const GAUGE_KM = 25;

/** Reflectivity of a sector at a scan, on the half decibels that the scans can hold. */
function dbzOf(sector: number, minute: number): number {
  return Math.round(2 * (17 + 2.1 * sector + 7 * Math.sin(minute / 17 + 2 * sector))) / 2;
}

function rateOf(sector: number, minute: number): number {
  return (10 ** (dbzOf(sector, minute) / 10) / PLANTED.a) ** (1 / PLANTED.b);
}

/** Between two scans, at the ends of a step, rain changes evenly: the mean of both, over a twelfth of an hour. */
function stepMm(sector: number, endMinute: number): number {
  return (rateOf(sector, endMinute - 5) + rateOf(sector, endMinute)) / 24;
}

/** Writes scans, gauges and a plan; the last gauge writes three times too much, and a person has left it out. */
export async function writeSectors(folder: string): Promise<string> {
  for (let minute = -5; minute <= 125; minute += 5) {
    const stored = Uint8Array.from({ length: RAYS * RADAR.gateCount }, (_, k) =>
      storedDbz(dbzOf(Math.floor(k / RADAR.gateCount / (RAYS / SECTORS)), minute)),
    );
    const startEpochMs = FROM + minute * 60_000 - (SWEEP_SECONDS / 2) * 1000;
    await writeVolume(path.join(folder, "scans", `round-${minute + 5}.h5`), RADAR, [
      { elevationDeg: 0.5, startEpochMs, stored },
    ]);
  }
  const sectors = Array.from({ length: SECTORS }, (_, sector) => sector);
  const readings = sectors.flatMap((sector) =>
    Array.from({ length: 24 }, (_, k) => {
      const end = new Date(FROM + (k + 1) * 300_000).toISOString();
      const times = sector === SECTORS - 1 ? 3 : 1;
      return `g${sector},${end},${(times * stepMm(sector, 5 * (k + 1))).toFixed(6)}`;
    }),
  );
  writeIn(folder, "gauges/readings.csv", `gauge,time,value_mm\n${readings.join("\n")}\n`);
  const earth = geodesicLibrary.Geodesic.WGS84;
  const stations = sectors.map((sector) => {
    const azimuth = ((sector + 0.5) * RAYS) / SECTORS;
    const { lon2 = 0, lat2 = 0 } = earth.Direct(RADAR.latDeg, RADAR.lonDeg, azimuth, GAUGE_KM * 1000);
    return `g${sector},Gauge,${lon2.toFixed(5)},${lat2.toFixed(5)}`;
  });
  writeIn(folder, "gauges/stations.csv", `id,name,lon,lat\n${stations.join("\n")}\n`);
  writeAreas(folder, [area("A", "Sound", [box(3.1, 52.6)])]);
  return writeIn(
    folder,
    "plan.yaml",
    planText({
      window: "{ from: 2031-06-01T12:00:00Z, to: 2031-06-01T14:00:00Z }",
      bootstrap: "{ samples: 100 }",
      overrides: `
  - { network: net, gauge: g${SECTORS - 1}, verdict: leave-out, reason: it counts twice, by: a test, date: 2031-06-02 }`,
    }),
  );
}
