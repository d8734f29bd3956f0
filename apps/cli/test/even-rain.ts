import { readFileSync, writeFileSync } from "node:fs";
import path from "node:path";
import { inflateSync } from "node:zlib";
import geodesicLibrary from "geographiclib-geodesic";
import { RAYS, SWEEP_SECONDS, type SweepToWrite, storedDbz, writeVolume } from "./odim-scans.ts";
import { NO_ECHO_WORK, writeIn } from "./total-kit.ts";

// An hour of even rain over everything that one radar sees: whatever is found wrong below was put there on purpose.
export const RADAR = { node: "zzeve", lonDeg: 3, latDeg: 52.5, gateM: 1000, gateCount: 60 };
const FROM = Date.UTC(2031, 5, 1, 12);
const DBZ = 40;
// Z = 200 R^1.6 (Marshall, Hitschfeld and Gunn, 1955): 11.5 mm/h.
export const RATE_MM_PER_HOUR = (10 ** (DBZ / 10) / 200) ** (1 / 1.6);
export const STEP_MM = RATE_MM_PER_HOUR / 12;

/** Noise of half a decibel, so that a packed array is long enough to spoil. */
function evenRain(): Uint8Array {
  return Uint8Array.from(
    { length: RAYS * RADAR.gateCount },
    (_, k) => storedDbz(DBZ) + (((k * 7919) % 13) % 2),
  );
}

export function sweepAt(minute: number, change: Partial<SweepToWrite> = {}): SweepToWrite {
  const startEpochMs = FROM + minute * 60_000 - (SWEEP_SECONDS / 2) * 1000;
  return { elevationDeg: 0.5, startEpochMs, stored: evenRain(), ...change };
}

/** Turns bits in the middle of the first packed array of an HDF5 file, so that it fails to unpack. */
export function spoilChunk(file: string): void {
  const bytes = readFileSync(file);
  for (let at = bytes.indexOf(0x78); at >= 0; at = bytes.indexOf(0x78, at + 1)) {
    if (unpackedLength(bytes.subarray(at)) !== RAYS * RADAR.gateCount) continue;
    for (let k = at + 40; k < at + 60; k++) bytes[k]! ^= 0xff;
    writeFileSync(file, bytes);
    return;
  }
  throw new Error("no packed array in this file");
}

function unpackedLength(bytes: Buffer): number {
  try {
    return inflateSync(bytes).length;
  } catch {
    return -1;
  }
}

const earth = geodesicLibrary.Geodesic.WGS84;
function seen(azimuthDeg: number, rangeKm: number): { lon: number; lat: number } {
  const { lon2 = 0, lat2 = 0 } = earth.Direct(RADAR.latDeg, RADAR.lonDeg, azimuthDeg, rangeKm * 1000);
  return { lon: lon2, lat: lat2 };
}

const quoted = (text: string) => `"${text.replaceAll('"', '""')}"`;

/** A gauge to write: its id, how much of the true depth it writes, and what its stations line says. */
export interface GaugeToWrite {
  readonly id: string;
  readonly times: number;
  readonly station?: string | undefined;
}

/**
 * Gauges whose hour is as wanted; from reading to reading each sways by a percent or so of its own, as two that read
 * the same throughout would pass for copies of one.
 */
export function writeGauges(folder: string, gauges: readonly GaugeToWrite[]): void {
  const readings = gauges.flatMap(({ id, times }, g) =>
    Array.from({ length: 12 }, (_, k) => {
      const end = new Date(FROM + (k + 1) * 300_000).toISOString();
      const sway = 1 + (k % 2 === 0 ? 0.002 : -0.002) * (g + 1);
      return `${quoted(id)},${end},${(STEP_MM * times * sway).toFixed(4)}`;
    }),
  );
  writeIn(folder, "gauges/readings.csv", `gauge,time,value_mm\n${readings.join("\n")}\n`);
  const stations = gauges.map(({ id, station }, k) => {
    const { lon, lat } = seen(20 + k * 17, 12 + k);
    return station ?? `${quoted(id)},Gauge,${lon.toFixed(5)},${lat.toFixed(5)}`;
  });
  const lines = stations.filter((line) => line !== "");
  writeIn(folder, "gauges/stations.csv", `id,name,lon,lat\n${lines.join("\n")}\n`);
}

export function area(id: string, name: string, rings: readonly (readonly (readonly number[])[])[]): object {
  return { type: "Feature", properties: { id, name }, geometry: { type: "Polygon", coordinates: rings } };
}

export function box(lon: number, lat: number, half = 0.05): number[][] {
  return [
    [lon - half, lat - half],
    [lon + half, lat - half],
    [lon + half, lat + half],
    [lon - half, lat + half],
    [lon - half, lat - half],
  ];
}

export function writeAreas(folder: string, features: readonly object[]): void {
  writeIn(folder, "areas.geojson", JSON.stringify({ type: "FeatureCollection", features }));
}

export function planText(change: Readonly<Record<string, string>> = {}): string {
  const parts: Record<string, string> = {
    title: "Even rain",
    window: "{ from: 2031-06-01T12:00:00Z, to: 2031-06-01T13:00:00Z }",
    scans: '["scans/*.h5"]',
    radars: "[{ id: zzeve, medianRoundMinutes: 5, maxGapMinutes: 12.5 }]",
    gauges: `
  - network: net
    files: [gauges/readings.csv]
    stations: { file: gauges/stations.csv, columns: { id: id, name: name, x: lon, y: lat } }
    layout: long
    columns: { gauge: gauge, time: time, value: value_mm }
    kind: increments
    unit: mm
    stepMinutes: 5`,
    catchments: "{ file: areas.geojson, id: id, name: name }",
    // Figures are worked out by hand here, from echo as it was written.
    echo: JSON.stringify(NO_ECHO_WORK),
    grid: "{ crs: +proj=laea +lat_0=52.5 +lon_0=3 +ellps=GRS80 +units=m, westM: -40000, northM: 40000, cellM: 1000, nx: 80, ny: 80 }",
    ...change,
  };
  return Object.entries(parts)
    .filter(([, value]) => value !== "")
    .map(([key, value]) => `${key}: ${value}\n`)
    .join("");
}

/** Scans of a whole hour and a round on either side, but for the minutes that are left out. */
export async function writeScans(folder: string, without: readonly number[] = []): Promise<void> {
  for (let minute = -5; minute <= 65; minute += 5) {
    if (!without.includes(minute)) await writeVolume(scanAt(folder, minute), RADAR, [sweepAt(minute)]);
  }
}

export function scanAt(folder: string, minute: number): string {
  return path.join(folder, "scans", `round-${String(minute + 5).padStart(2, "0")}.h5`);
}

export const SOUND_GAUGES: readonly GaugeToWrite[] = ["g1", "g2", "g3", "g4", "g5", "g6"].map((id) => ({
  id,
  times: 1.2,
}));
export const SOUND_AREA = area("A", "Sound", [box(3.1, 52.6)]);
