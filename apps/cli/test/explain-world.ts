import path from "node:path";
import { area, box, planText } from "./even-rain.ts";
import { RAYS, type RadarToWrite, SWEEP_SECONDS, storedDbz, writeVolume } from "./odim-scans.ts";
import { writeIn } from "./total-kit.ts";

// Two radars whose rounds do not keep step, over two hours of showers with a core above the hail cap: scans are
// missing, one radar falls silent for half an hour, and the lowest sweep of the other has a hole and echo of hills.
const FROM = Date.UTC(2031, 5, 1, 12);
const WEST: RadarToWrite = { node: "zzwes", lonDeg: 3, latDeg: 52.5, gateM: 1000, gateCount: 40 };
const EAST: RadarToWrite = { node: "zzeas", lonDeg: 3.5, latDeg: 52.6, gateM: 1000, gateCount: 40 };
const NOTHING = 255;
const UNDETECT = 0;

/** A number from 0 to 1 that any three numbers give: the generator of Park and Miller (1988), a few turns of it. */
function noise(a: number, b: number, c: number): number {
  let state = ((a * 7919 + b * 104_729 + c * 1_299_709 + 1) % 2_147_483_647) + 1;
  for (let turn = 0; turn < 4; turn++) state = (state * 16_807) % 2_147_483_647;
  return state / 2_147_483_647;
}

/** Showers that drift east: two cells, one of them above 53 dBZ in its middle, and light rain about them. */
function sweep(radar: RadarToWrite, minute: number, elevationDeg: number) {
  const startEpochMs = FROM + minute * 60_000 - (SWEEP_SECONDS / 2) * 1000;
  const stored = Uint8Array.from({ length: RAYS * radar.gateCount }, (_, index) => {
    const gate = index % radar.gateCount;
    const ray = (index - gate) / radar.gateCount;
    const rangeKm = ((gate + 0.5) * radar.gateM) / 1000;
    const azimuth = ((ray + 0.5) * Math.PI) / 180;
    const eastKm = (radar.lonDeg - 3) * 68 + rangeKm * Math.sin(azimuth);
    const northKm = (radar.latDeg - 52.5) * 111 + rangeKm * Math.cos(azimuth);
    if (elevationDeg < 1 && radar === WEST && ray >= 60 && ray < 75 && gate > 10) return NOTHING;
    if (elevationDeg < 1 && radar === WEST && ray >= 190 && ray < 215 && gate >= 12 && gate < 21)
      return storedDbz(45 + Math.round(6 * noise(ray, gate, 0)));
    const core = 54.5 - 2 * Math.hypot(eastKm + 20 - 0.5 * minute, northKm - 8);
    const shower = 42 - 1.5 * Math.hypot(eastKm - 25 + 0.2 * minute, northKm + 20);
    const light = eastKm > -30 ? 22 : -40;
    const dbz = Math.max(core, shower, light) + 3 * noise(ray, gate, Math.round(minute * 10)) - 1.5;
    return dbz < -20 ? UNDETECT : Math.min(254, Math.max(1, Math.round(storedDbz(dbz))));
  });
  return { elevationDeg, startEpochMs, stored };
}

/** Writes the scans of two hours, and of the rounds at their ends. */
async function writeScans(folder: string): Promise<void> {
  for (let minute = -5; minute <= 125; minute += 5) {
    if (minute !== 30)
      await writeVolume(path.join(folder, "scans", `west-${minute + 5}.h5`), WEST, [
        sweep(WEST, minute, 0.5),
        sweep(WEST, minute + 1, 1.5),
      ]);
    const later = minute + 2.5;
    if (later < 47 || later > 77)
      await writeVolume(path.join(folder, "scans", `east-${minute + 5}.h5`), EAST, [sweep(EAST, later, 0.5)]);
  }
}

const GAUGE_IDS = ["G1", "G2", "G3", "G4", "G5", "G6", "G7", "G8"];

/** Eight gauges of one network, and one of another that has an id of the first. */
function writeGauges(folder: string): void {
  const ids = GAUGE_IDS;
  const readings = (names: readonly string[]) =>
    names.flatMap((id, g) =>
      Array.from({ length: 24 }, (_, k) => {
        const end = new Date(FROM + (k + 1) * 300_000).toISOString();
        return `${id},${end},${(0.3 + 0.4 * noise(g, k, 5)).toFixed(1)}`;
      }),
    );
  writeIn(folder, "gauges/net.csv", `gauge,time,value_mm\n${readings(ids).join("\n")}\n`);
  writeIn(folder, "gauges/far.csv", `gauge,time,value_mm\n${readings(["G1"]).join("\n")}\n`);
  const stations = ids.map((id, g) => `${id},Gauge ${id},${3 + 0.05 * (g - 3)},${52.45 + 0.04 * (g % 4)}`);
  writeIn(folder, "gauges/net-stations.csv", `id,name,lon,lat\n${stations.join("\n")}\n`);
  writeIn(folder, "gauges/far-stations.csv", "id,name,lon,lat\nG1,Far,3.2,52.55\n");
}

const network = (name: string) => `
  - network: ${name}
    files: [gauges/${name}.csv]
    stations: { file: gauges/${name}-stations.csv, columns: { id: id, name: name, x: lon, y: lat } }
    layout: long
    columns: { gauge: gauge, time: time, value: value_mm }
    kind: increments
    unit: mm
    stepMinutes: 5`;

/** Writes scans, gauges, a catchment and a plan. @returns the plan */
export async function writeShowers(folder: string): Promise<string> {
  await writeScans(folder);
  writeGauges(folder);
  const catchment = JSON.stringify({
    type: "FeatureCollection",
    features: [area("A", "Sound", [box(3.1, 52.55)])],
  });
  writeIn(folder, "areas.geojson", catchment);
  return writeIn(
    folder,
    "plan.yaml",
    planText({
      // As a fresh plan has it: every step from echo to rain is taken.
      echo: "",
      title: "Showers",
      grid: "{ crs: +proj=laea +lat_0=52.5 +lon_0=3 +ellps=GRS80 +units=m, westM: -25000, northM: 35000, cellM: 1000, nx: 60, ny: 60 }",
      window: "{ from: 2031-06-01T12:00:00Z, to: 2031-06-01T14:00:00Z }",
      radars:
        "[{ id: zzwes, medianRoundMinutes: 5, maxGapMinutes: 12.5 }, { id: zzeas, medianRoundMinutes: 5, maxGapMinutes: 12.5, offsetDb: 1 }]",
      gauges: `${network("net")}${network("far")}`,
      adjustment: "{ method: idw-additive }",
      // Readings drawn by lot agree with no radar: they are used because a person says so.
      overrides: JSON.stringify(
        [...GAUGE_IDS.map((gauge) => ["net", gauge]), ["far", "G1"]].map(([net, gauge]) => ({
          network: net,
          gauge,
          verdict: "use",
          reason: "drawn by lot",
          by: "the test",
          date: "2031-06-02",
        })),
      ),
    }),
  );
}
