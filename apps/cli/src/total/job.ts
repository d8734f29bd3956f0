import type {
  BlendedStep,
  CellFractions,
  IntervalFields,
  RadarIntegrator,
  RadarStep,
  TimeRules,
} from "@rainreckon/accumulation";
import {
  type CapSetting,
  type EchoSettings,
  type GateRateSettings,
  type Grid,
  type Interval,
  type LearnedEcho,
  type Notice,
  type PolarEcho,
  type RadarSite,
  SCREENS,
  type Sweep,
  type ZrRelation,
} from "@rainreckon/core";
import type { GriddedOptions, GriddedQuantity, GriddedScan } from "@rainreckon/formats";
import type { CellLookup, GateRates, LookupRules, PolarLookup, RateLayer } from "@rainreckon/mosaic";
import type { ScanPaths } from "../scans/scan-files.ts";

/** A sweep as a unit of work needs it: where it is, and when it speaks. */
export interface JobSweep extends ScanPaths {
  /** What people see in place of the absolute path. */
  readonly name: string;
  /** Index among the headers of its file. */
  readonly index: number;
  readonly elevationDeg: number;
  readonly midEpochMs: number;
}

/** One round of one radar: sweeps in ascending elevation. */
export interface JobRound {
  readonly sweeps: readonly JobSweep[];
  readonly firstMidEpochMs: number;
  readonly lastMidEpochMs: number;
  /** Whether this is the radar's first or last round in all the input. */
  readonly isFirst: boolean;
  readonly isLast: boolean;
}

/** A relation and the time it holds for: from is excluded, to is included. */
export interface JobRelation extends Interval {
  readonly relation: ZrRelation;
}

/** How weak an echo a radar sees; learned before the units of work. */
export interface JobSensitivity {
  /** Weakest echo, brought to 1 km; and the least that is shown at any range, dBZ. */
  readonly at1KmDbz: number;
  readonly floorDbz: number;
  /** The files say so, or their scans show it. */
  readonly basis: "file" | "scans";
}

/** How reflectivity becomes rain. */
export interface JobConversion {
  readonly moment: string;
  readonly offsetDb: number;
  readonly cap: CapSetting;
  readonly minRateMmPerHour: number;
  /** Later entries win. The first one holds for all time. */
  readonly relations: readonly JobRelation[];
}

/** How the echo of a radar is worked on before it becomes rain, and what was learned for that. */
export interface JobEcho {
  readonly settings: EchoSettings;
  readonly learned: LearnedEcho;
  /** Whether showers and widespread rain are told apart. */
  readonly rainType: boolean;
  readonly rate: Pick<GateRateSettings, "convective" | "stratiform" | "polarimetric">;
}

export interface JobRadar extends JobConversion {
  readonly site: RadarSite;
  readonly beamWidthDeg: number;
  /** From the plan, else from the files; undefined where neither tells. */
  readonly wavelengthM: number | undefined;
  /** Undefined where nothing tells. */
  readonly sensitivity: JobSensitivity | undefined;
  readonly time: TimeRules;
  readonly lookup: LookupRules;
  readonly rounds: readonly JobRound[];
  /** Undefined where nothing is screened or corrected. */
  readonly echo: JobEcho | undefined;
}

/** One layer of a gridded file. */
export interface JobLayer {
  /** Absolute path, and the name that people see. */
  readonly path: string;
  readonly name: string;
  /** Index among the headers of its file, as opened with `options`. */
  readonly index: number;
  readonly options: GriddedOptions;
  /** Both the one instant it speaks for; of a depth, its start and end. */
  readonly firstMidEpochMs: number;
  readonly lastMidEpochMs: number;
  readonly isFirst: boolean;
  readonly isLast: boolean;
}

/** Rain or reflectivity that is gridded already. */
export interface JobGrids {
  readonly id: string;
  readonly quantity: GriddedQuantity;
  /** Of reflectivity only. */
  readonly conversion: JobConversion | undefined;
  readonly time: TimeRules;
  /** In time order. */
  readonly rounds: readonly JobLayer[];
}

/** What all units of a run share. Whatever holds an entry for each source has the radars first, then the grids. */
export interface RunShape {
  readonly grid: Grid;
  readonly radars: readonly JobRadar[];
  readonly grids: readonly JobGrids[];
  /** Relations of the headline other than the ones in use; their depths are kept at the headline's cells. */
  readonly variants: readonly ZrRelation[];
  readonly headlineCells: Int32Array;
  /** Shape [gauges]: the cells that stand for each gauge. */
  readonly gaugeCells: readonly (readonly number[])[];
  /** Cells spread over the map, of which steps are kept beside those of gauges. */
  readonly fieldCells: Int32Array;
  /** Those of catchments, then those of assets. */
  readonly areas: readonly CellFractions[];
}

/** A run of whole grid intervals, with the steps they are made of. */
export interface UnitJob {
  readonly number: number;
  readonly intervals: readonly Interval[];
  readonly steps: readonly Interval[];
}

/** Depths and shares on the steps of a unit. Shapes [gauges or areas][steps]. */
export interface StepSeries {
  readonly depthMm: readonly Float64Array[];
  readonly observedFraction: readonly Float64Array[];
}

export interface AreaStepSeries extends StepSeries {
  readonly maxCellMm: readonly Float64Array[];
  readonly cappedMm: readonly Float64Array[];
}

/** Sums over the sweeps that a unit owns: those whose mid-time lies in it, so that border scans count once. */
export interface UnitCounts {
  sweepsDecoded: number;
  gatesRead: number;
  gatesCapped: number;
  cellsFilledByHigherSweep: number;
  /** Of gridded files: layers, their cells, and those of reflectivity at the cap. */
  gridLayersDecoded: number;
  gridCellsRead: number;
  gridCellsCapped: number;
  /** Of sweeps whose echo was worked on: gates with echo, and what became of gates. */
  gatesWithEcho: number;
  gatesFilled: number;
  gatesLostInAttenuation: number;
  gatesBlocked: number;
  gatesHail: number;
  gatesMelting: number;
  gatesSnow: number;
  gatesBesideCores: number;
  /** Shape [SCREENS]: gates by the first screen that took them. */
  readonly gatesScreened: number[];
  /** By 10 km of range, the last one all beyond: what the vertical profile added. */
  readonly profileBands: ProfileBand[];
}

/** Gates with echo in a band of range, the decibels added to them in hundredths, and gates that it cost. */
export interface ProfileBand {
  wetGates: number;
  addedCentiDb: number;
  lostGates: number;
}

/** Bands of 10 km that are told apart; farther out no weather radar looks. */
const PROFILE_BANDS = 50;

export function noCounts(): UnitCounts {
  return {
    sweepsDecoded: 0,
    gatesRead: 0,
    gatesCapped: 0,
    cellsFilledByHigherSweep: 0,
    gridLayersDecoded: 0,
    gridCellsRead: 0,
    gridCellsCapped: 0,
    gatesWithEcho: 0,
    gatesFilled: 0,
    gatesLostInAttenuation: 0,
    gatesBlocked: 0,
    gatesHail: 0,
    gatesMelting: 0,
    gatesSnow: 0,
    gatesBesideCores: 0,
    gatesScreened: SCREENS.map(() => 0),
    profileBands: Array.from({ length: PROFILE_BANDS }, () => ({
      wetGates: 0,
      addedCentiDb: 0,
      lostGates: 0,
    })),
  };
}

/** Ids of all sources of a run, in their order. */
export function sourceIds({ radars, grids }: Pick<RunShape, "radars" | "grids">): string[] {
  return [...radars.map(({ site }) => site.id), ...grids.map(({ id }) => id)];
}

/** A sweep that could not be decoded, and the name of its file. */
export interface SweepFault extends Notice {
  readonly file: string;
}

export interface UnitResult {
  readonly intervals: readonly IntervalFields[];
  /** Shape [intervals][cells]: depth of the rain that the radars could not have seen. */
  readonly unseenMm: readonly Float32Array[];
  readonly gauges: StepSeries;
  /** Shape [field cells][steps]: depth, NaN where not observed. */
  readonly fieldMm: readonly Float32Array[];
  readonly areas: AreaStepSeries;
  readonly counts: UnitCounts;
  /** Sweeps that could not be decoded. */
  readonly notices: readonly SweepFault[];
}

/** How the rates of a worked sweep were made. Shapes [rayCount * gateCount]. */
export interface RatesMade {
  /** Indices of `RATE_METHODS`. */
  readonly method: Uint8Array;
  /** Factors on every rate from Z, for the size and for the number of drops. */
  readonly dropSizeFactor: number;
  readonly dropNumberFactor: number;
  /** Numbers of `RAIN_TYPE`; undefined where showers and widespread rain were not told apart. */
  readonly rainType: Uint8Array | undefined;
}

/** A sweep that has spoken. */
export interface SpokenSweep {
  readonly radar: JobRadar;
  readonly sweep: JobSweep;
  readonly lookup: PolarLookup;
  readonly gates: GateRates;
  /** The relation in use at its time. */
  readonly relation: ZrRelation;
  /** Undefined where its stored numbers went straight to rain. */
  readonly echo: PolarEcho | undefined;
  /** Undefined where all rates are those of the relation in use. */
  readonly made: RatesMade | undefined;
  /** Decodes the moment that rain is made from once more, in stored numbers. */
  stored(): Sweep;
}

/** A layer of a gridded file that is on the grid. */
export interface SpokenGrid {
  readonly source: JobGrids;
  readonly round: JobLayer;
  readonly scan: GriddedScan;
  readonly lookup: CellLookup;
  readonly gates: GateRates;
  /** Undefined where rain came as rain. */
  readonly relation: ZrRelation | undefined;
  readonly layer: RateLayer;
}

/** Is told, while a unit works, of all that its figures are made from; what it is handed must not be changed. */
export interface UnitTrace {
  sweep?(spoken: SpokenSweep): void;
  /** A round is on the grid; its sweeps were told of before, in the order of the layer's slots. */
  layer?(radar: JobRadar, round: JobRound, layer: RateLayer): void;
  grid?(spoken: SpokenGrid): void;
  /** The sources of a step were blended; shape of `sources` as in `sourceIds`. */
  step?(
    span: Interval,
    step: number,
    sources: readonly { readonly step: RadarStep; readonly integrator: RadarIntegrator }[],
    blended: BlendedStep,
  ): void;
}
