import {
  type BlendedStep,
  type Contribution,
  contributionsAt,
  type RadarInStep,
} from "@rainreckon/accumulation";
import { cellCentre, type Grid, type Interval } from "@rainreckon/core";
import { geodesicInverse, type Projection, type RateLayer } from "@rainreckon/mosaic";
import type { JobRadar, JobRound, SpokenGrid, SpokenSweep, UnitTrace } from "../total/job.ts";
import { isoUtc } from "../ui/numbers.ts";
import { finite, gateAccount, silenceOf } from "./gate-account.ts";
import type { GateAccount, ScanAccount } from "./schema.ts";

/** A scan as one cell met it, before it has its number. */
export type MetScan = Omit<ScanAccount, "number"> & { readonly epochMs: number };

/** A stretch of time that added to a cell, with the scans at its ends. */
export interface MetPart extends Omit<Contribution, "layer0" | "layer1"> {
  readonly step: Interval;
  readonly scan: MetScan;
  readonly nextScan: MetScan;
}

/** What a step came to at a cell. */
export interface MetStep extends Interval {
  /** NaN where nobody observed. */
  readonly depthMm: number;
  readonly observedMs: number;
}

/** All that was told of one cell. */
export interface CellAccount {
  readonly scans: readonly MetScan[];
  readonly parts: readonly MetPart[];
  readonly steps: readonly MetStep[];
}

/** What one sweep said of a cell, before it is known whether it speaks for it. */
interface Heard {
  readonly spoken: SpokenSweep;
  readonly dataset: string;
  /** Shape [traced cells]; undefined where the sweep does not reach a cell. */
  readonly gates: readonly (readonly GateAccount[] | undefined)[];
}

/** Listens to units of work and writes down, for some cells, everything that made their depth. */
export class CellTracer implements UnitTrace {
  readonly #grid: Grid;
  readonly #map: Projection;
  readonly #cells: readonly number[];
  /** By radar: the sweeps of the round in work. */
  readonly #heard = new Map<JobRadar, Heard[]>();
  /** By cell: scans by source and time, since those at the borders of units are met twice. */
  readonly #scans: readonly Map<string, MetScan>[];
  /** By the array of rates that a layer keeps through the integration: its scan at each traced cell. */
  readonly #scansOfRates = new WeakMap<Float32Array, readonly (MetScan | undefined)[]>();
  readonly #parts: readonly MetPart[][];
  readonly #steps: readonly MetStep[][];

  /** @param cells - flat indices, each once */
  constructor(grid: Grid, map: Projection, cells: readonly number[]) {
    this.#grid = grid;
    this.#map = map;
    this.#cells = cells;
    this.#scans = cells.map(() => new Map());
    this.#parts = cells.map(() => []);
    this.#steps = cells.map(() => []);
  }

  /** Of the traced cell with this place in the list. */
  accountOf(index: number): CellAccount {
    const scans = [...(this.#scans[index] as Map<string, MetScan>).values()];
    scans.sort((a, b) => a.epochMs - b.epochMs || (a.source < b.source ? -1 : a.source > b.source ? 1 : 0));
    return {
      scans,
      parts: this.#parts[index] as readonly MetPart[],
      steps: this.#steps[index] as readonly MetStep[],
    };
  }

  sweep(spoken: SpokenSweep): void {
    const { radar, lookup } = spoken;
    const heard = this.#heard.get(radar) ?? [];
    this.#heard.set(radar, heard);
    const reaches = this.#cells.some((cell) => (lookup.position[cell] as number) >= 0);
    // Told of all the same, since a layer counts the sweeps that made it.
    if (!reaches) {
      heard.push({ spoken, dataset: "", gates: [] });
      return;
    }
    const stored = spoken.stored();
    const gates = this.#cells.map((cell) => {
      const at = lookup.position[cell] as number;
      if (at < 0) return undefined;
      const own = lookup.gates.subarray(lookup.start[at], lookup.start[at + 1]);
      return Array.from(own, (index) => gateAccount(spoken, stored, index));
    });
    heard.push({ spoken, dataset: stored.origin.dataset, gates });
  }

  layer(radar: JobRadar, round: JobRound, layer: RateLayer): void {
    // A round that said nothing makes no layer; what was heard of it is still there.
    const heard = (this.#heard.get(radar) ?? []).filter(({ spoken }) => round.sweeps.includes(spoken.sweep));
    this.#heard.delete(radar);
    const scans = this.#cells.map((_, k) => this.#scanOf(k, radar, round, layer, heard));
    this.#scansOfRates.set(layer.rateMmPerHour, scans);
  }

  grid({ source, round, scan, lookup, gates, layer }: SpokenGrid): void {
    const scans = this.#cells.map((cell, k) => {
      const at = lookup.position[cell] as number;
      if (at < 0) return undefined;
      const own = lookup.gates.subarray(lookup.start[at], lookup.start[at + 1]);
      return this.#once(k, `${source.id} ${round.lastMidEpochMs} ${round.name}`, () => ({
        epochMs: round.lastMidEpochMs,
        source: source.id,
        kind: "gridded",
        file: round.name,
        dataset: scan.origin.dataset,
        elevationDeg: null,
        time: isoUtc(round.lastMidEpochMs),
        azimuthDeg: null,
        rangeKm: null,
        beamHeightAslM: null,
        dropSizeFactor: null,
        dropNumberFactor: null,
        gates: [],
        gridValues: Array.from(own, (index) => ({
          value: finite(scan.values[index]),
          rateMmPerHour: finite(
            gates.rateMmPerHour[gates.codes === undefined ? index : (gates.codes[index] as number)],
          ),
        })),
        gridQuantity: scan.quantity,
        passedOver: [],
        rateMmPerHour: finite(layer.rateMmPerHour[cell]),
        weight: finite(layer.weight[cell]),
      }));
    });
    this.#scansOfRates.set(layer.rateMmPerHour, scans);
  }

  step(span: Interval, step: number, sources: readonly RadarInStep[], blended: BlendedStep): void {
    for (const [k, cell] of this.#cells.entries()) {
      this.#steps[k]?.push({
        startEpochMs: span.startEpochMs,
        endEpochMs: span.endEpochMs,
        depthMm: blended.depthMm[cell] as number,
        observedMs: blended.observedMs[cell] as number,
      });
      for (const { layer0, layer1, ...part } of contributionsAt(span, step, cell, sources)) {
        const scan = this.#scansOfRates.get(layer0.rateMmPerHour)?.[k];
        const nextScan = this.#scansOfRates.get(layer1.rateMmPerHour)?.[k];
        if (scan === undefined || nextScan === undefined)
          throw new RangeError("a layer speaks for a cell that no scan was heard of");
        this.#parts[k]?.push({ ...part, step: span, scan, nextScan });
      }
    }
  }

  #scanOf(
    k: number,
    radar: JobRadar,
    round: JobRound,
    layer: RateLayer,
    heard: readonly Heard[],
  ): MetScan | undefined {
    const cell = this.#cells[k] as number;
    const rate = layer.rateMmPerHour[cell] as number;
    const reached = heard.filter(({ gates }) => gates[k] !== undefined);
    if (reached.length === 0) return undefined;
    return this.#once(k, `${radar.site.id} ${round.firstMidEpochMs}`, () => {
      const speaker = rate >= 0 ? heard[layer.slot?.[cell] ?? 0] : undefined;
      const { xM, yM } = cellCentre(this.#grid, cell);
      const [lonDeg, latDeg] = this.#map.inverse(xM, yM);
      const { distanceM, azimuthDeg } = geodesicInverse(radar.site, { lonDeg, latDeg });
      const below = speaker === undefined ? reached : reached.slice(0, reached.indexOf(speaker));
      const epochMs = speaker?.spoken.sweep.midEpochMs ?? round.firstMidEpochMs;
      return {
        epochMs,
        source: radar.site.id,
        kind: "sweep",
        file: speaker?.spoken.sweep.name ?? null,
        dataset: speaker?.dataset ?? null,
        elevationDeg: speaker?.spoken.sweep.elevationDeg ?? null,
        time: isoUtc(epochMs),
        azimuthDeg,
        rangeKm: distanceM / 1000,
        beamHeightAslM: speaker === undefined ? null : finite(layer.beamHeightAslM[cell]),
        dropSizeFactor: finite(speaker?.spoken.made?.dropSizeFactor),
        dropNumberFactor: finite(speaker?.spoken.made?.dropNumberFactor),
        gates: [...(speaker?.gates[k] ?? [])],
        gridValues: [],
        gridQuantity: null,
        passedOver: below.map(({ spoken, gates }) => ({
          file: spoken.sweep.name,
          elevationDeg: spoken.sweep.elevationDeg,
          why: silenceOfAll(gates[k] ?? []),
        })),
        rateMmPerHour: finite(rate),
        weight: speaker === undefined ? null : finite(layer.weight[cell]),
      };
    });
  }

  #once(k: number, key: string, make: () => MetScan): MetScan {
    const scans = this.#scans[k] as Map<string, MetScan>;
    const known = scans.get(key) ?? make();
    scans.set(key, known);
    return known;
  }
}

/** Why no gate of a cell speaks, each reason once. */
function silenceOfAll(gates: readonly GateAccount[]): string {
  const reasons = new Set(gates.map(silenceOf).filter((reason) => reason !== undefined));
  return [...reasons].join(", ") || "not observed";
}
