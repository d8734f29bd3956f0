import { arcDistanceM, effectiveRadiusM, STANDARD_RADIUS_FACTOR } from "../../beam.ts";
import { zMm6PerM3 } from "../../units.ts";
import { markBit, type PolarEcho } from "../polar-echo.ts";
import { RAIN_TYPE } from "../rain-type/steiner.ts";
import { type BeamSettings, gateHeights } from "./gate-table.ts";

/** Linear Z aloft against Z in the lowest sweep of the same round, above the same band of ground. */
export interface EchoRatio {
  /** Beam of the sweep aloft, and of the lowest sweep: centre above mean sea level, spread over height. */
  readonly aloftM: number;
  readonly aloftSigmaM: number;
  readonly lowestM: number;
  readonly lowestSigmaM: number;
  readonly ratioDb: number;
  /** Standard error of the ratio from its spread over rounds. */
  readonly errorDb: number;
  readonly rounds: number;
  /** Cells of {@link CELL_DEG} by {@link CELL_M} that were compared. */
  readonly cells: number;
}

/** Cells in which sweeps of a round are compared: wide enough for rain that drifts between them. */
const CELL_DEG = 2;
const CELL_M = 2000;
const SECTORS = 360 / CELL_DEG;
/** As far as beams tell heights apart; beyond, nothing is learned. */
const REACH_M = 100_000;
const BANDS = REACH_M / CELL_M;
/** Share of a cell's gates that must be observed. */
const ENOUGH_OF_CELL = 0.75;
/** Cells that a band needs in a round. */
const ENOUGH_CELLS = 5;
/** Mean rain around a cell: less is lost in the noise aloft, more is taken for showers where no rain type is given. */
const LIGHTEST_Z = zMm6PerM3(10);
const SHOWER_Z = zMm6PerM3(40);
/** Sweeps that begin farther apart belong to different rounds. */
const LONGEST_ROUND_MS = 20 * 60_000;
/** Terrain may take this share of the beam before the echo is left out. */
const MOST_BLOCKED = 0.05;

interface CellGrid {
  readonly elevationDeg: number;
  readonly startEpochMs: number;
  /** Shape [BANDS * SECTORS]: mean Z, NaN where too little was observed. */
  readonly z: Float64Array;
  /** Shape [BANDS * SECTORS]: 1 where some echo is convective; undefined where nobody said. */
  readonly convective: Uint8Array | undefined;
  /** Shape [BANDS]: mean over the gates of the band, NaN beyond the sweep. */
  readonly centreM: Float64Array;
  readonly sigmaM: Float64Array;
}

/** What kind of rain a cell has, in the lowest sweep. */
type RainKind = "widespread" | "showers";
const LIGHT = 0;
const WIDESPREAD = 1;
const SHOWERS = 2;

/** Sums of a pair of elevations, for each kind of rain. */
interface PairSums {
  readonly lowest: CellGrid;
  readonly aloft: CellGrid;
  readonly of: Readonly<Record<RainKind, BandSums>>;
}

/** Shape [BANDS] each. */
interface BandSums {
  readonly aloftZ: Float64Array;
  readonly lowestZ: Float64Array;
  readonly cells: Float64Array;
  readonly rounds: Float64Array;
  readonly sumDb: Float64Array;
  readonly sumDb2: Float64Array;
}

/**
 * Collects the mean apparent profile of a run: sums of linear Z by elevation and range band over sums of the lowest
 * sweep, cells where both were observed (after Joss and Lee 1995, J. Appl. Meteorol. 34, 2612-2630, who average
 * profiles in Z over time and area). Sweeps come round by round, in any order within a round.
 */
export class EchoRatios {
  readonly #settings: BeamSettings;
  readonly #pairs = new Map<string, PairSums>();
  #round: CellGrid[] = [];

  constructor(settings: BeamSettings = {}) {
    this.#settings = settings;
  }

  add(echo: PolarEcho, rainType: Uint8Array | undefined): void {
    const { elevationDeg, startEpochMs } = echo.header;
    const first = this.#round[0];
    const next =
      this.#round.some((grid) => Math.abs(grid.elevationDeg - elevationDeg) < 0.1) ||
      (first !== undefined && Math.abs(startEpochMs - first.startEpochMs) > LONGEST_ROUND_MS);
    if (next) this.#closeRound();
    this.#round.push(cellGrid(echo, rainType, this.#settings));
  }

  /** @param kind - showers are cells with convective echo, or very strong ones where nobody tells the type */
  ratios(kind: RainKind = "widespread"): EchoRatio[] {
    this.#closeRound();
    return [...this.#pairs.keys()].sort().flatMap((key) => ratiosOf(this.#pairs.get(key) as PairSums, kind));
  }

  #closeRound(): void {
    const [lowest, ...higher] = this.#round.sort((a, b) => a.elevationDeg - b.elevationDeg);
    this.#round = [];
    if (lowest === undefined) return;
    const kinds = kindsOfCells(lowest);
    for (const aloft of higher) {
      const key = `${aloft.elevationDeg.toFixed(1)} ${lowest.elevationDeg.toFixed(1)}`;
      const sums = this.#pairs.get(key) ?? emptySums(lowest, aloft);
      this.#pairs.set(key, sums);
      addPair(sums.of.widespread, lowest, aloft, kinds, WIDESPREAD);
      addPair(sums.of.showers, lowest, aloft, kinds, SHOWERS);
    }
  }
}

function emptySums(lowest: CellGrid, aloft: CellGrid): PairSums {
  const zeros = () => new Float64Array(BANDS);
  const bands = (): BandSums => ({
    aloftZ: zeros(),
    lowestZ: zeros(),
    cells: zeros(),
    rounds: zeros(),
    sumDb: zeros(),
    sumDb2: zeros(),
  });
  return { lowest, aloft, of: { widespread: bands(), showers: bands() } };
}

/** Kinds of the cells of the lowest sweep, by the rain around them so that no cell is chosen for its own chance. */
function kindsOfCells({ z, convective }: CellGrid): Uint8Array {
  const kinds = new Uint8Array(BANDS * SECTORS).fill(LIGHT);
  for (let band = 0; band < BANDS; band++) {
    for (let sector = 0; sector < SECTORS; sector++) {
      let sum = 0;
      let count = 0;
      let shower = false;
      for (let b = Math.max(0, band - 1); b <= Math.min(BANDS - 1, band + 1); b++) {
        for (let s = -1; s <= 1; s++) {
          const cell = b * SECTORS + ((sector + s + SECTORS) % SECTORS);
          const value = z[cell] as number;
          if (Number.isNaN(value)) continue;
          sum += value;
          count++;
          shower ||= convective === undefined ? value > SHOWER_Z : convective[cell] === 1;
        }
      }
      if (sum > count * LIGHTEST_Z) kinds[band * SECTORS + sector] = shower ? SHOWERS : WIDESPREAD;
    }
  }
  return kinds;
}

function addPair(sums: BandSums, lowest: CellGrid, aloft: CellGrid, kinds: Uint8Array, kind: number): void {
  for (let band = 0; band < BANDS; band++) {
    let aloftZ = 0;
    let lowestZ = 0;
    let cells = 0;
    for (let cell = band * SECTORS; cell < (band + 1) * SECTORS; cell++) {
      const [below, above] = [lowest.z[cell] as number, aloft.z[cell] as number];
      if (kinds[cell] !== kind || Number.isNaN(below) || Number.isNaN(above)) continue;
      aloftZ += above;
      lowestZ += below;
      cells++;
    }
    if (cells < ENOUGH_CELLS || aloftZ === 0 || lowestZ === 0) continue;
    const db = 10 * Math.log10(aloftZ / lowestZ);
    (sums.aloftZ[band] as number) += aloftZ;
    (sums.lowestZ[band] as number) += lowestZ;
    (sums.cells[band] as number) += cells;
    (sums.rounds[band] as number)++;
    (sums.sumDb[band] as number) += db;
    (sums.sumDb2[band] as number) += db * db;
  }
}

function ratiosOf({ lowest, aloft, of }: PairSums, kind: RainKind): EchoRatio[] {
  const sums = of[kind];
  const found: EchoRatio[] = [];
  for (let band = 0; band < BANDS; band++) {
    const rounds = sums.rounds[band] as number;
    const aloftM = aloft.centreM[band] as number;
    const lowestM = lowest.centreM[band] as number;
    if (rounds === 0 || Number.isNaN(aloftM) || Number.isNaN(lowestM)) continue;
    const meanDb = (sums.sumDb[band] as number) / rounds;
    const variance = Math.max(0, (sums.sumDb2[band] as number) / rounds - meanDb * meanDb);
    found.push({
      aloftM,
      aloftSigmaM: aloft.sigmaM[band] as number,
      lowestM,
      lowestSigmaM: lowest.sigmaM[band] as number,
      ratioDb: 10 * Math.log10((sums.aloftZ[band] as number) / (sums.lowestZ[band] as number)),
      errorDb: Math.sqrt(variance / rounds),
      rounds,
      cells: sums.cells[band] as number,
    });
  }
  return found;
}

/** Linear Z by tenths of a dB: a power for each gate would cost more than all the rest. */
const TABLE_FROM_DBZ = -60;
const TABLE_PER_DB = 10;
const Z_TABLE = Float64Array.from({ length: 1500 }, (_, i) => zMm6PerM3(TABLE_FROM_DBZ + i / TABLE_PER_DB));

function linearZ(dbz: number): number {
  if (!(dbz > TABLE_FROM_DBZ)) return 0;
  const entry = Math.round((dbz - TABLE_FROM_DBZ) * TABLE_PER_DB);
  return Z_TABLE[Math.min(entry, Z_TABLE.length - 1)] as number;
}

/** Gates that are screened, filled, or behind terrain say nothing of the profile. */
export function unfitGate({ screenedBy, marks, blockedFraction }: PolarEcho): (index: number) => boolean {
  const unfit = markBit("filled") | markBit("blocked") | markBit("lost-in-attenuation") | markBit("hail");
  return (index) =>
    screenedBy[index] !== 0 ||
    ((marks[index] as number) & unfit) !== 0 ||
    (blockedFraction !== undefined && (blockedFraction[index] as number) > MOST_BLOCKED);
}

function cellGrid(echo: PolarEcho, rainType: Uint8Array | undefined, settings: BeamSettings): CellGrid {
  const { header, azimuthDeg, dbz } = echo;
  const { elevationDeg, startEpochMs, rayCount, gateCount, firstGateCentreM, gateLengthM } = header;
  const radiusM = effectiveRadiusM(settings.radiusFactor ?? STANDARD_RADIUS_FACTOR);
  const heights = gateHeights(header, settings);
  const cells = BANDS * SECTORS;
  const z = new Float64Array(cells);
  const observed = new Int32Array(cells);
  const all = new Int32Array(cells);
  const convective = rainType === undefined ? undefined : new Uint8Array(cells);
  const bandOfGate = new Int32Array(gateCount);
  const centreM = new Float64Array(BANDS);
  const sigmaM = new Float64Array(BANDS);
  const gates = new Float64Array(BANDS);
  let reach = 0;
  for (let gate = 0; gate < gateCount; gate++) {
    const arcM = arcDistanceM(firstGateCentreM + gate * gateLengthM, elevationDeg, radiusM);
    const band = Math.max(0, Math.floor(arcM / CELL_M));
    if (band >= BANDS) break;
    bandOfGate[gate] = band;
    reach = gate + 1;
    (centreM[band] as number) += heights.centreM[gate] as number;
    (sigmaM[band] as number) += heights.sigmaM[gate] as number;
    (gates[band] as number)++;
  }
  for (let band = 0; band < BANDS; band++) {
    (centreM[band] as number) /= gates[band] as number;
    (sigmaM[band] as number) /= gates[band] as number;
  }
  const unfit = unfitGate(echo);
  for (let ray = 0; ray < rayCount; ray++) {
    const sector = Math.floor((azimuthDeg[ray] as number) / CELL_DEG) % SECTORS;
    for (let gate = 0; gate < reach; gate++) {
      const index = ray * gateCount + gate;
      const cell = (bandOfGate[gate] as number) * SECTORS + sector;
      (all[cell] as number)++;
      const value = dbz[index] as number;
      if (Number.isNaN(value) || unfit(index)) continue;
      (observed[cell] as number)++;
      (z[cell] as number) += linearZ(value);
      if (convective !== undefined && rainType?.[index] === RAIN_TYPE.convective) convective[cell] = 1;
    }
  }
  for (let cell = 0; cell < cells; cell++) {
    const [seen, gatesOfCell] = [observed[cell] as number, all[cell] as number];
    z[cell] = seen > 0 && seen >= ENOUGH_OF_CELL * gatesOfCell ? (z[cell] as number) / seen : Number.NaN;
  }
  return { elevationDeg, startEpochMs, z, convective, centreM, sigmaM };
}
