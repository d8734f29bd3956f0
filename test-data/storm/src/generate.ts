import { createHash } from "node:crypto";
import { mkdirSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { gzipSync } from "node:zlib";
import { catchmentsGeoJson, holds, type PlaneCatchment, planeCatchments } from "./catchments.ts";
import { equalAreaPlane, type Plane } from "./earth.ts";
import { GateTruth } from "./gate-truth.ts";
import { type GaugeFiles, type GaugeRecord, recordGauges, writeGauges } from "./gauges.ts";
import { heightGeoTiff } from "./geotiff.ts";
import { cutTruth, TRUTH_RATE_STEP_MM_PER_HOUR, type TruthGrid, truthGrid, weatherLattice } from "./grids.ts";
import { interferenceRays } from "./interference.ts";
import { odimDateTime, type WrittenSweep, writeSweeps } from "./odim.ts";
import type { StormPreset, WorldTold } from "./presets.ts";
import {
  emptySweepTruth,
  measureSweep,
  NOISE_STRIDE,
  RAY_COUNT,
  type RadarPlan,
  type SweepGeometry,
  sweepGeometry,
} from "./radar.ts";
import { noiseTable, RandomStream } from "./random.ts";
import { terrainM } from "./terrain.ts";
import { emptyMoment, type Lattice, type Moment, type StormShape, Weather } from "./weather.ts";

/** The middle of the invented district: open sea, so that it can be taken for no place. */
export const DISTRICT_CENTRE = { lonDeg: 3, latDeg: 52.5 };

/** A preset and where to put the storm. */
export interface StormOptions extends StormPreset {
  /** Folder to write into; made where it is missing. Files of the same names are overwritten. */
  readonly folder: string;
  /** Write what is true at every gate too; see `GateTruth`. */
  readonly gates?: boolean;
}

/** What was written. */
export interface StormSummary {
  readonly radarFiles: number;
  readonly gaugeCount: number;
  readonly meanMm: number;
  readonly maximumMm: number;
}

/**
 * Makes the invented storm: radar files, gauge files, catchments, terrain, and the truth.
 *
 * The same options give the same bytes. Needs `minutes` to be a whole number of rounds and of 10 minutes.
 *
 * @param onProgress - called after each minute of the storm
 * @throws RangeError for sizes and times that do not fit together
 */
export async function generateStorm(
  options: StormOptions,
  onProgress?: (minutesDone: number, minutes: number) => void,
): Promise<StormSummary> {
  if (!(options.minutes > 0) || options.minutes % 10 !== 0 || options.minutes % options.roundMinutes !== 0) {
    throw new RangeError(
      `minutes must be a whole number of rounds and of 10 minutes, got ${options.minutes} with rounds of ${options.roundMinutes}`,
    );
  }
  const plane = equalAreaPlane(DISTRICT_CENTRE);
  const grid = truthGrid(plane.proj, options.sizeKm);
  const lattice = weatherLattice(options.sizeKm, options.radars);
  const random = new RandomStream(options.seed);
  const weather = new Weather(random, weatherShape(options, lattice));
  for (const folder of ["", "gauges", "truth", ...options.radars.map(({ node }) => join("radar", node))]) {
    mkdirSync(join(options.folder, folder), { recursive: true });
  }

  const watch = new Watch(options, plane, noiseTable(random));
  const truth = new Truth(grid, options.minutes);
  const buffers = emptyMoment(lattice, 0, weather.drift);
  for (let minute = 0; minute < options.minutes; minute++) {
    const due = watch.dueIn(minute);
    const moment = weather.fill(lattice, { ...buffers, minute: minute + 0.5 }, due.length > 0);
    truth.add(minute, moment, lattice);
    for (const sweep of due) await watch.measure(sweep, moment, lattice);
    onProgress?.(minute + 1, options.minutes);
  }

  const records = recordGauges(weather, random, plane, options.sizeKm, options.minutes, options.gauges);
  const ground = (xKm: number, yKm: number): number => terrainM(xKm, yKm, options.ridges);
  const gauges = writeGauges(records, plane, options.startEpochMs, ground);
  const catchments = planeCatchments(options.sizeKm);
  writeDistrict(options, plane, gauges, catchments, ground);
  truth.write(join(options.folder, "truth"));
  watch.gates?.write(join(options.folder, "truth"));
  const told = truthJson(options, plane, grid, truth, records, gauges, catchments, watch, weather);
  writeFileSync(join(options.folder, "truth", "truth.json"), `${JSON.stringify(told, null, 1)}\n`);
  return {
    radarFiles: watch.filesWritten,
    gaugeCount: records.length,
    meanMm: told.district.meanMm,
    maximumMm: told.district.maximumMm,
  };
}

/** What the weather of a storm is to be like, over the lattice that its radars need. */
export function weatherShape(storm: StormPreset, lattice: Lattice): StormShape {
  return {
    minutes: storm.minutes,
    districtHalfKm: storm.sizeKm * 0.3,
    surroundingsHalfKm: Math.max(lattice.nx, lattice.ny) / 2,
    meanMm: storm.meanMm,
    maximumMm: storm.maximumMm,
    pattern: storm.pattern,
  };
}

/** One sweep that falls due: which radar, which of its sweeps, which round. */
interface DueSweep {
  readonly radar: RadarPlan;
  readonly index: number;
  readonly roundEpochMs: number;
  readonly startSecond: number;
}

/** A sweep that another transmitter fell into. */
interface SpikedSweep {
  readonly node: string;
  readonly start: string;
  readonly elevationDeg: number;
  readonly azimuthsDeg: readonly number[];
}

/** The radars at work: knows what is measured when, and when a file is complete. */
class Watch {
  readonly #options: StormOptions;
  readonly #plane: Plane;
  readonly #noise: Float32Array;
  readonly #geometries = new Map<RadarPlan, SweepGeometry[]>();
  readonly #waiting = new Map<RadarPlan, WrittenSweep[]>();
  readonly #spikes: SpikedSweep[] = [];
  readonly #digest = createHash("sha256");
  readonly gates: GateTruth | undefined;
  #sweepsMade = 0;
  filesWritten = 0;

  constructor(options: StormOptions, plane: Plane, noise: Float32Array) {
    this.#options = options;
    this.#plane = plane;
    this.#noise = noise;
    this.gates = options.gates === true ? new GateTruth() : undefined;
    for (const radar of options.radars) {
      this.#geometries.set(
        radar,
        radar.sweeps.map(({ elevationDeg }) =>
          sweepGeometry(radar, elevationDeg, plane, options.ridges, options.meltingLayer, options.turbines),
        ),
      );
      this.#waiting.set(radar, []);
    }
  }

  geometryOf(radar: RadarPlan): readonly SweepGeometry[] {
    return this.#geometries.get(radar)!;
  }

  /** Sweeps whose middle lies in the minute, in the order in which they are made. */
  dueIn(minute: number): DueSweep[] {
    const { roundMinutes, startEpochMs, radars } = this.#options;
    const round = Math.floor(minute / roundMinutes);
    const due = radars.flatMap((radar) =>
      radar.sweeps.map(({ startSecond }, index) => ({
        radar,
        index,
        roundEpochMs: startEpochMs + round * roundMinutes * 60_000,
        startSecond: round * roundMinutes * 60 + startSecond,
      })),
    );
    return due
      .filter(({ radar, startSecond }) => Math.floor((startSecond + radar.sweepSeconds / 2) / 60) === minute)
      .sort((a, b) => a.startSecond - b.startSecond);
  }

  async measure(due: DueSweep, moment: Moment, lattice: Lattice): Promise<void> {
    const { radar, index, startSecond } = due;
    const startEpochMs = this.#options.startEpochMs + startSecond * 1000;
    const { elevationDeg } = radar.sweeps[index]!;
    const { seed, interference } = this.#options;
    const spikeRays =
      interference?.node === radar.node ? interferenceRays(interference, seed, this.#sweepsMade) : [];
    if (spikeRays.length > 0) {
      this.#spikes.push({
        node: radar.node,
        start: new Date(startEpochMs).toISOString(),
        elevationDeg,
        azimuthsDeg: spikeRays.map((ray) => ray + 0.5),
      });
    }
    const truth = this.gates === undefined ? undefined : emptySweepTruth(radar);
    const moments = measureSweep(
      radar,
      this.geometryOf(radar)[index]!,
      lattice,
      moment,
      startSecond / 60,
      { table: this.#noise, start: this.#sweepsMade++ * NOISE_STRIDE },
      { spikeRays, spikeDbzAt1Km: interference?.dbzAt1Km ?? 0, truth },
    );
    for (const stored of Object.values(moments)) this.#digest.update(stored);
    if (truth !== undefined) this.gates?.add(radar, elevationDeg, startEpochMs, truth);
    const sweep: WrittenSweep = {
      elevationDeg,
      startEpochMs,
      endEpochMs: startEpochMs + radar.sweepSeconds * 1000,
      moments,
    };
    const waiting = this.#waiting.get(radar)!;
    waiting.push(sweep);
    if (radar.files === "volumes" && waiting.length < radar.sweeps.length) return;
    await this.#writeFile(radar, due.roundEpochMs, waiting.splice(0));
  }

  get spikes(): readonly SpikedSweep[] {
    return this.#spikes;
  }

  /** SHA-256 over all stored moments in the order in which they were made; to be asked for once. */
  scansSha256(): string {
    return this.#digest.digest("hex");
  }

  async #writeFile(radar: RadarPlan, roundEpochMs: number, sweeps: readonly WrittenSweep[]): Promise<void> {
    const single = radar.files === "sweeps";
    const stamp = odimDateTime(single ? sweeps[0]!.startEpochMs : roundEpochMs);
    const tail = single ? `_${sweeps[0]!.elevationDeg.toFixed(1)}deg` : "";
    const name = `${radar.node}_${stamp.date}T${stamp.time}Z${tail}.h5`;
    const path = join(this.#options.folder, "radar", radar.node, name);
    const nominal = single ? sweeps[0]!.startEpochMs : roundEpochMs;
    await writeSweeps(path, radar, this.#plane.toPlace(radar.xKm, radar.yKm), nominal, sweeps);
    this.filesWritten += 1;
  }
}

/** What truly fell on the ground, kept minute by minute. */
class Truth {
  readonly grid: TruthGrid;
  readonly totalMm: Float64Array;
  readonly #hourMm: Float64Array[] = [];
  readonly #rateSteps: Uint16Array;
  readonly #cut: Float32Array;

  constructor(grid: TruthGrid, minutes: number) {
    const cells = grid.nx * grid.ny;
    this.grid = grid;
    this.totalMm = new Float64Array(cells);
    this.#cut = new Float32Array(cells);
    this.#rateSteps = new Uint16Array(cells * minutes);
    for (let hour = 0; hour * 60 < minutes; hour++) this.#hourMm.push(new Float64Array(cells));
  }

  add(minute: number, moment: Moment, lattice: Lattice): void {
    cutTruth(moment.rateMmPerHour, lattice, this.grid, this.#cut);
    const hour = this.#hourMm[Math.floor(minute / 60)]!;
    const first = minute * this.#cut.length;
    this.#cut.forEach((rate, cell) => {
      this.totalMm[cell]! += rate / 60;
      hour[cell]! += rate / 60;
      this.#rateSteps[first + cell] = Math.round(rate / TRUTH_RATE_STEP_MM_PER_HOUR);
    });
  }

  get hours(): number {
    return this.#hourMm.length;
  }

  write(folder: string): void {
    const float32 = (values: Float64Array): Uint8Array => new Uint8Array(Float32Array.from(values).buffer);
    writeFileSync(join(folder, "depth_total_mm.f32"), float32(this.totalMm));
    this.#hourMm.forEach((values, hour) => {
      writeFileSync(join(folder, hourName(hour)), float32(values));
    });
    const rates = gzipSync(new Uint8Array(this.#rateSteps.buffer), { level: 4 });
    writeFileSync(join(folder, "rain_rate.u16.gz"), rates);
  }
}

function hourName(hour: number): string {
  return `depth_hour_${String(hour + 1).padStart(2, "0")}_mm.f32`;
}

/** Gauge files, catchments and terrain. */
function writeDistrict(
  options: StormOptions,
  plane: Plane,
  gauges: GaugeFiles,
  catchments: readonly PlaneCatchment[],
  ground: (xKm: number, yKm: number) => number,
): void {
  const put = (name: string, content: string | Uint8Array): void =>
    writeFileSync(join(options.folder, name), content);
  put("gauges/moor.csv", gauges.moor);
  put("gauges/moor_stations.csv", gauges.moorStations);
  put("gauges/saltwater.csv", gauges.saltwater);
  put("gauges/saltwater_stations.csv", gauges.saltwaterStations);
  put("gauges/tideway_tips.csv", gauges.tideway);
  put("gauges/tideway_stations.csv", gauges.tidewayStations);
  put("catchments.geojson", catchmentsGeoJson(catchments, plane));
  put("terrain.tif", terrainTiff(options.sizeKm, plane, ground));
  put("README.txt", DISTRICT_NOTE);
}

/** What the people of the district would tell along with their files. */
const DISTRICT_NOTE = `Invented data. Saltermoor is no place; its radars, gauges, catchments and storm do not exist.

gauges/moor.csv          5-minute depths in mm, stamped at the end, UTC
gauges/saltwater.csv     10-minute depths in mm, stamped at the end, local standard time all year (UTC+1)
gauges/tideway_tips.csv  one line a tip of 0.2 mm, UTC; no line means no tip
truth/truth.json         what truly fell, and every fault that was planted
`;

/** The ground on a longitude-latitude grid that covers the truth grid, about 300 m a cell. */
function terrainTiff(sizeKm: number, plane: Plane, ground: (xKm: number, yKm: number) => number): Buffer {
  const cellLonDeg = 0.004;
  const cellLatDeg = 0.0025;
  const halfLon = Math.ceil((sizeKm / 2 + 4) / 65 / cellLonDeg);
  const halfLat = Math.ceil((sizeKm / 2 + 4) / 111 / cellLatDeg);
  const nx = 2 * halfLon;
  const ny = 2 * halfLat;
  const westDeg = DISTRICT_CENTRE.lonDeg - halfLon * cellLonDeg;
  const northDeg = DISTRICT_CENTRE.latDeg + halfLat * cellLatDeg;
  const heightM = new Int16Array(nx * ny);
  for (let row = 0; row < ny; row++) {
    for (let column = 0; column < nx; column++) {
      const { xKm, yKm } = plane.toPlane({
        lonDeg: westDeg + (column + 0.5) * cellLonDeg,
        latDeg: northDeg - (row + 0.5) * cellLatDeg,
      });
      heightM[row * nx + column] = Math.round(ground(xKm, yKm));
    }
  }
  return heightGeoTiff({ westDeg, northDeg, cellLonDeg, cellLatDeg, nx, ny, heightM });
}

/** The truth in words and numbers: grid, what fell where, what was planted. */
function truthJson(
  options: StormOptions,
  plane: Plane,
  grid: TruthGrid,
  truth: Truth,
  records: readonly GaugeRecord[],
  gauges: GaugeFiles,
  catchments: readonly PlaneCatchment[],
  watch: Watch,
  weather: Weather,
) {
  const iso = (epochMs: number): string => new Date(epochMs).toISOString();
  const half = options.sizeKm * 0.3;
  const district = summarise(truth, (x, y) => Math.abs(x) <= half && Math.abs(y) <= half);
  return {
    note: "Invented: Saltermoor is no place, and this storm never fell.",
    ...(options.world === undefined ? {} : { world: worldJson(options, options.world, watch, weather) }),
    seed: options.seed,
    window: { from: iso(options.startEpochMs), to: iso(options.startEpochMs + options.minutes * 60_000) },
    grid,
    files: {
      total: "depth_total_mm.f32",
      hours: Array.from({ length: truth.hours }, (_, hour) => hourName(hour)),
      rates: {
        file: "rain_rate.u16.gz",
        stepMmPerHour: TRUTH_RATE_STEP_MM_PER_HOUR,
        minutes: options.minutes,
        layout:
          "gzip of little-endian uint16, shape [minute, row, column]; minute k stands for k to k+1 after the start, taken at its middle",
      },
      layout: "little-endian float32, shape [row, column], row 0 in the north; value of the cell's centre",
    },
    district: { halfSideKm: half, ...district },
    catchments: catchments.map((catchment) => ({
      id: catchment.id,
      name: catchment.name,
      ...summarise(truth, (x, y) => holds(catchment, x, y)),
    })),
    gauges: records.map((record) => ({
      network: record.plan.network,
      id: record.plan.id,
      lonDeg: record.place.lonDeg,
      latDeg: record.place.latDeg,
      xM: record.xKm * 1000,
      yM: record.yKm * 1000,
      trueTotalMm: round3(record.trueMm.reduce((sum, depth) => sum + depth, 0)),
      trueHourlyMm: Array.from({ length: truth.hours }, (_, hour) =>
        round3(record.trueMm.slice(hour * 60, hour * 60 + 60).reduce((sum, depth) => sum + depth, 0)),
      ),
      fault: record.plan.fault ?? null,
    })),
    planted: {
      gaugeFaults: gauges.faults,
      meltingLayer: options.meltingLayer,
      radars: options.radars.map((radar) => ({
        node: radar.node,
        band: radar.band,
        ...plane.toPlace(radar.xKm, radar.yKm),
        calibrationOffsetDb: radar.calibrationOffsetDb,
        lossDbPerDeg: radar.lossDbPerDeg,
        noiseDbzAt1Km: radar.noiseDbzAt1Km,
        systemPhaseDeg: radar.systemPhaseDeg,
        sweeps: watch.geometryOf(radar).map((geometry) => ({
          elevationDeg: geometry.elevationDeg,
          blockedRays: blockedRays(radar, geometry),
          clutterGates: geometry.clutterZ.reduce((count, z) => count + (z > 0 ? 1 : 0), 0),
        })),
      })),
    },
  };
}

/** The truth about a world: its words, and where its artefacts lie. */
function worldJson(options: StormOptions, world: WorldTold, watch: Watch, weather: Weather) {
  return {
    ...world,
    scansSha256: watch.scansSha256(),
    driftKmPerMinute: weather.drift,
    dropNumberFactor: options.pattern?.dropNumberFactor ?? 1,
    hailCores: weather.cells
      .filter(({ hailDbz }) => hailDbz !== undefined)
      .map((cell) => ({
        xKmAtHeight: round3(cell.xKm),
        yKmAtHeight: round3(cell.yKm),
        xKmPerMinute: round3(cell.xKmPerMinute),
        yKmPerMinute: round3(cell.yKmPerMinute),
        heightMinute: round3(cell.midMinute),
        lifeMinutes: round3(cell.lifeMinutes),
        hailDbz: round3(cell.hailDbz!),
      })),
    turbines: options.turbines ?? [],
    turbineGates: options.radars.flatMap((radar) =>
      watch.geometryOf(radar).map(({ elevationDeg, turbine }) => ({
        node: radar.node,
        elevationDeg,
        gates: [...turbine.keys()]
          .filter((index) => turbine[index] === 1)
          .map((index) => ({
            azimuthDeg: Math.floor(index / radar.gateCount) + 0.5,
            rangeM: ((index % radar.gateCount) + 0.5) * radar.gateM,
          })),
      })),
    ),
    interference: watch.spikes,
  };
}

/** Rays that lose at least half of their power to terrain: azimuth of the ray's centre, and the share lost. */
function blockedRays(radar: RadarPlan, geometry: SweepGeometry): { azimuthDeg: number; lost: number }[] {
  const rays: { azimuthDeg: number; lost: number }[] = [];
  for (let ray = 0; ray < RAY_COUNT; ray++) {
    const lost = 1 - geometry.open[(ray + 1) * radar.gateCount - 1]!;
    if (lost >= 0.5) rays.push({ azimuthDeg: ray + 0.5, lost: round3(lost) });
  }
  return rays;
}

function summarise(truth: Truth, within: (xKm: number, yKm: number) => boolean) {
  const { grid, totalMm } = truth;
  let sum = 0;
  let cells = 0;
  let maximum = 0;
  totalMm.forEach((depth, index) => {
    const xKm = grid.westM / 1000 + (index % grid.nx) + 0.5;
    const yKm = grid.northM / 1000 - Math.floor(index / grid.nx) - 0.5;
    if (!within(xKm, yKm)) return;
    sum += depth;
    cells += 1;
    maximum = Math.max(maximum, depth);
  });
  return { cells, meanMm: round3(sum / cells), maximumMm: round3(maximum) };
}

function round3(value: number): number {
  return Math.round(value * 1000) / 1000;
}
