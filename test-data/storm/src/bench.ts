import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { beamPosition } from "./beam.ts";
import { travel } from "./earth.ts";
import { odimDateTime, putArray, putReal, putText, putWhole, writeHdf5 } from "./odim.ts";
import { NOISE_LENGTH, noiseTable, RandomStream } from "./random.ts";
import { textureAt, wrappedTexture } from "./texture.ts";

/** How much data to make for timing; no physics in it. */
export interface BenchOptions {
  /** Gets radar/*.h5, stations.csv and gauges_5min.csv. */
  readonly folder: string;
  /** Rounds of 5 minutes from 2030-01-01T00:00Z: 288 make a day. */
  readonly volumes: number;
  readonly sweeps?: number;
  readonly rays?: number;
  readonly gates?: number;
  readonly seed?: number;
}

const SITE = { lonDeg: 3, latDeg: 52.5 };
const START_EPOCH_MS = Date.UTC(2030, 0, 1);
const ROUND_MS = 300_000;
const GATE_M = 500;
const ELEVATIONS_DEG = [0.5, 1.2, 2.4, 4, 6, 8.5, 12, 17];
const SWEEP_MS = 30_000;
/** Different fields; the storm wanders through them forth and back, so that it never jumps. */
const FIELD_COUNT = 24;
/** Share of the lowest sweep's gates with echo. */
const ECHO_SHARE = 0.375;
const GAIN = 0.5;
const OFFSET = -32;

/**
 * Writes many volumes quickly: a set of fields is compressed once each, and every volume is a copy of one
 * of them with its own times in place. ODIM_H5 PVOL, DBZH as uint8 in data1, one gzip chunk a sweep, about
 * three eighths of the lowest sweep's gates with echo.
 *
 * @throws RangeError for sizes that make no volume
 */
export async function generateBenchVolumes(options: BenchOptions): Promise<void> {
  const { folder, volumes, sweeps = 4, rays = 360, gates = 500, seed = 1 } = options;
  if (volumes < 1 || sweeps < 1 || sweeps > ELEVATIONS_DEG.length || rays < 1 || gates < 1) {
    throw new RangeError(`cannot make ${volumes} volumes of ${sweeps} sweeps, ${rays} rays, ${gates} gates`);
  }
  const radarFolder = join(folder, "radar");
  mkdirSync(radarFolder, { recursive: true });
  const scene = new Scene(seed, sweeps, rays, gates);
  const stations = benchStations();
  const gaugeLines = ["station,time,value"];
  const count = Math.min(FIELD_COUNT, volumes);
  const templates: Template[] = [];
  const depths: number[][] = [];
  const scratch = mkdtempSync(join(tmpdir(), "bench-field-"));
  try {
    for (let field = 0; field < count; field++) {
      const arrays = scene.sweepsOf(field);
      templates.push(await makeTemplate(join(scratch, "field.h5"), arrays, rays, gates));
      depths.push(
        stations.map(({ azimuthDeg, rangeM }) => depthMm(arrays[0]!, azimuthDeg, rangeM, rays, gates)),
      );
    }
  } finally {
    rmSync(scratch, { recursive: true });
  }
  for (let volume = 0; volume < volumes; volume++) {
    const field = wander(volume, count);
    const startEpochMs = START_EPOCH_MS + volume * ROUND_MS;
    const { date, time } = odimDateTime(startEpochMs);
    const stamp = `${date}T${time}Z`;
    writeFileSync(join(radarFolder, `zzbnc_${stamp}.h5`), templates[field]!.stampedFor(startEpochMs));
    const end = new Date(startEpochMs + ROUND_MS).toISOString().replace(".000Z", "Z");
    stations.forEach(({ id }, i) => {
      gaugeLines.push(`${id},${end},${depths[field]![i]!.toFixed(2)}`);
    });
  }
  const stationLines = stations.map(
    ({ id, lonDeg, latDeg }) => `${id},${lonDeg.toFixed(5)},${latDeg.toFixed(5)}`,
  );
  writeFileSync(join(folder, "stations.csv"), `${["id,lon,lat", ...stationLines].join("\n")}\n`);
  writeFileSync(join(folder, "gauges_5min.csv"), `${gaugeLines.join("\n")}\n`);
}

/** Which field a volume shows: 0, 1, … count-1, count-2, … 1, 0, 1, … */
function wander(volume: number, count: number): number {
  if (count === 1) return 0;
  const place = volume % (2 * count - 2);
  return place < count ? place : 2 * count - 2 - place;
}

/** The patterns behind all fields. */
class Scene {
  readonly #texture: Float32Array;
  readonly #noise: Float32Array;
  readonly #dryBelow: number;
  readonly #sweeps: number;
  readonly #rays: number;
  readonly #gates: number;

  constructor(seed: number, sweeps: number, rays: number, gates: number) {
    const random = new RandomStream(seed);
    this.#texture = wrappedTexture(random, [64, 32, 16, 8, 4, 2], 0.7);
    this.#noise = noiseTable(random);
    this.#sweeps = sweeps;
    this.#rays = rays;
    this.#gates = gates;
    this.#dryBelow = this.#quantile(1 - ECHO_SHARE);
  }

  /** The pattern's value that a share of the gates of all fields stays below, from a sparse sample. */
  #quantile(share: number): number {
    const sample: number[] = [];
    for (let field = 0; field < FIELD_COUNT; field++) {
      for (let i = 0; i < 2000; i++) {
        const azimuth = i * 2.399963;
        const km = (((i + 0.5) / 2000) * this.#gates * GATE_M) / 1000;
        sample.push(this.#patternAt(km * Math.sin(azimuth), km * Math.cos(azimuth), field));
      }
    }
    return sample.sort((a, b) => a - b)[Math.floor(share * sample.length)]!;
  }

  #patternAt(eastKm: number, northKm: number, field: number): number {
    return textureAt(this.#texture, eastKm - 3.3 * field, northKm - 1.2 * field);
  }

  /** Stored DBZH of every sweep of one field; the pattern moves 3.5 km from field to field. */
  sweepsOf(field: number): Uint8Array[] {
    return Array.from({ length: this.#sweeps }, (_, sweep) => this.#sweep(field, ELEVATIONS_DEG[sweep]!));
  }

  #sweep(field: number, elevationDeg: number): Uint8Array {
    const stored = new Uint8Array(this.#rays * this.#gates);
    const ground = Float64Array.from(
      { length: this.#gates },
      (_, gate) => beamPosition(((gate + 0.5) * GATE_M) / 1000, elevationDeg).arcKm,
    );
    let dice = Math.round(elevationDeg * 1000) + field * 31337;
    for (let ray = 0; ray < this.#rays; ray++) {
      const azimuth = ((ray + 0.5) * 2 * Math.PI) / this.#rays;
      const east = Math.sin(azimuth);
      const north = Math.cos(azimuth);
      for (let gate = 0; gate < this.#gates; gate++) {
        const km = ground[gate]!;
        const pattern = this.#patternAt(km * east, km * north, field);
        // Higher sweeps look into thinner echo.
        const above = pattern - this.#dryBelow - 0.02 * (elevationDeg - 0.5);
        if (above <= 0) continue;
        const dbz = 12 + 14 * above + 2.5 * this.#noise[dice++ & (NOISE_LENGTH - 1)]!;
        stored[ray * this.#gates + gate] = Math.max(1, Math.min(254, Math.round((dbz - OFFSET) / GAIN)));
      }
    }
    return stored;
  }
}

/** Texts of the right length that stand where each volume's own times go; each occurs once in a file. */
const placeholder = {
  date: (sweep: number, edge: "S" | "E"): string => `DATE${edge}${String(sweep).padStart(3, "0")}`,
  time: (sweep: number, edge: "S" | "E"): string => `TIM${edge}${String(sweep).padStart(2, "0")}`,
};

/** A finished file whose times can be overwritten in place. */
class Template {
  readonly #bytes: Buffer;
  readonly #places: { readonly offset: number; readonly lateMs: number; readonly part: "date" | "time" }[] =
    [];

  constructor(bytes: Buffer, sweeps: number) {
    this.#bytes = bytes;
    for (let sweep = -1; sweep < sweeps; sweep++) {
      for (const edge of ["S", "E"] as const) {
        if (sweep < 0 && edge === "E") continue;
        const lateMs = sweep < 0 ? 0 : sweep * (SWEEP_MS + 15_000) + (edge === "E" ? SWEEP_MS : 0);
        for (const part of ["date", "time"] as const) {
          this.#places.push({ offset: onlyPlace(bytes, placeholder[part](sweep + 1, edge)), lateMs, part });
        }
      }
    }
  }

  /** The file's bytes for a round that starts then. The buffer is shared: write it before asking again. */
  stampedFor(startEpochMs: number): Buffer {
    for (const { offset, lateMs, part } of this.#places) {
      this.#bytes.write(odimDateTime(startEpochMs + lateMs)[part], offset, "latin1");
    }
    return this.#bytes;
  }
}

function onlyPlace(bytes: Buffer, text: string): number {
  const offset = bytes.indexOf(text, 0, "latin1");
  if (offset < 0 || bytes.indexOf(text, offset + 1, "latin1") >= 0) {
    throw new Error(`the text ${text} must stand exactly once in the file`);
  }
  return offset;
}

async function makeTemplate(
  path: string,
  sweeps: readonly Uint8Array[],
  rays: number,
  gates: number,
): Promise<Template> {
  // The oldest layout keeps no checksums over attributes: they may be overwritten.
  await writeHdf5(
    path,
    (root) => {
      putText(root, "Conventions", "ODIM_H5/V2_3");
      const what = root.create_group("what");
      putText(what, "object", "PVOL");
      putText(what, "version", "H5rad 2.3");
      putText(what, "date", placeholder.date(0, "S"));
      putText(what, "time", placeholder.time(0, "S"));
      putText(what, "source", "NOD:zzbnc,PLC:Bench (invented)");
      const where = root.create_group("where");
      putReal(where, "lon", SITE.lonDeg);
      putReal(where, "lat", SITE.latDeg);
      putReal(where, "height", 50);
      const how = root.create_group("how");
      putText(how, "simulated", "True");
      putReal(how, "wavelength", 10.7);
      putReal(how, "beamwidth", 1);
      sweeps.forEach((stored, i) => {
        const dataset = root.create_group(`dataset${i + 1}`);
        const times = dataset.create_group("what");
        putText(times, "product", "SCAN");
        putText(times, "startdate", placeholder.date(i + 1, "S"));
        putText(times, "starttime", placeholder.time(i + 1, "S"));
        putText(times, "enddate", placeholder.date(i + 1, "E"));
        putText(times, "endtime", placeholder.time(i + 1, "E"));
        const geometry = dataset.create_group("where");
        putReal(geometry, "elangle", ELEVATIONS_DEG[i]!);
        putReal(geometry, "rstart", 0);
        putReal(geometry, "rscale", GATE_M);
        putWhole(geometry, "nrays", rays);
        putWhole(geometry, "nbins", gates);
        putWhole(geometry, "a1gate", 0);
        const data = dataset.create_group("data1");
        const codes = data.create_group("what");
        putText(codes, "quantity", "DBZH");
        putReal(codes, "gain", GAIN);
        putReal(codes, "offset", OFFSET);
        putReal(codes, "nodata", 255);
        putReal(codes, "undetect", 0);
        putArray(data, stored, gates);
      });
    },
    "without checksums",
  );
  return new Template(readFileSync(path), sweeps.length);
}

interface BenchStation {
  readonly id: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly azimuthDeg: number;
  readonly rangeM: number;
}

/** Twenty gauges on a spiral round the radar, out to 130 km. */
function benchStations(): BenchStation[] {
  return Array.from({ length: 20 }, (_, i) => {
    const azimuthDeg = (i * 137.5) % 360;
    const rangeM = 10_000 + 6_000 * i;
    const id = `B${String(i + 1).padStart(2, "0")}`;
    return { id, ...travel(SITE, azimuthDeg, rangeM), azimuthDeg, rangeM };
  });
}

/** Five minutes of the rain over a station, by Z = 200 R^1.6 (Marshall, Hitschfeld and Gunn, 1955). */
function depthMm(
  stored: Uint8Array,
  azimuthDeg: number,
  rangeM: number,
  rays: number,
  gates: number,
): number {
  const gate = Math.floor(rangeM / GATE_M);
  if (gate >= gates) return 0;
  const code = stored[Math.floor((azimuthDeg / 360) * rays) * gates + gate]!;
  if (code === 0) return 0;
  return (10 ** ((code * GAIN + OFFSET) / 10) / 200) ** (1 / 1.6) / 12;
}
