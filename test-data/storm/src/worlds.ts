import { dealtFaults, lonelyGauge, networkAtFault, SOUND_GAUGES } from "./gauge-worlds.ts";
import {
  cloudburstOver,
  HAIL_STORMS,
  LIGHT_RAIN,
  lineAcross,
  MIXED_RAIN,
  MIXED_RAIN_WITH_HAIL,
  STEADY_RAIN,
  WARM_RAIN,
} from "./patterns.ts";
import { DEMO, SMALL, type StormPreset } from "./presets.ts";
import type { MeltingLayer, RadarPlan, Turbine } from "./radar.ts";
import { RandomStream } from "./random.ts";
import type { Ridge } from "./terrain.ts";

/** 60 km, 24 rounds; or the demo's 160 km, 72 rounds. */
export type WorldSize = "small" | "full";

/** Seeds to tune methods on, and seeds to report on: no method may be changed after a look at the latter. */
export const TUNING_SEEDS: readonly number[] = [1, 2, 3, 4, 5, 6, 7, 8, 9, 10];
export const REPORT_SEEDS: readonly number[] = Array.from({ length: 20 }, (_, i) => 11 + i);

/** The parts that worlds of one size and seed are put together from. */
interface Kit {
  readonly seed: number;
  readonly size: WorldSize;
  /** Kilometres of the map for each kilometre of a district 160 km wide. */
  readonly scale: number;
  readonly base: StormPreset;
  readonly sBand: RadarPlan;
  readonly cBand: RadarPlan;
}

type Parts = Omit<StormPreset, "seed" | "world"> & { readonly planted: readonly string[] };

/** A named world: what it is in words, and how it is put together. */
export interface World {
  readonly name: string;
  readonly says: string;
  readonly make: (kit: Kit) => Parts;
}

/** Melting layers in metres of height: below the far beams, as in warm weather, and where no beam goes. */
const WARM_LAYER: MeltingLayer = { bottomKm: 2.9, topKm: 3.4 };
const TROPICAL_LAYER: MeltingLayer = { bottomKm: 4.7, topKm: 5.2 };
const NO_LAYER_IN_REACH: MeltingLayer = { bottomKm: 15, topKm: 15.5 };

/** Low enough to be met by the lowest sweep within the size's ranges. */
function lowLayer(size: WorldSize): MeltingLayer {
  return size === "small" ? { bottomKm: 0.6, topKm: 1.1 } : { bottomKm: 1.4, topKm: 1.9 };
}

const layerWords = (layer: MeltingLayer): string =>
  `melting layer ${layer.bottomKm} to ${layer.topKm} km above sea level: widespread rain echoes 6 dB more in its middle, and 4.5 dB/km less above it`;

const GROUND_WORDS = "both radars: ground clutter near the site, left in part in DBZH";

function withOffset(radar: RadarPlan, calibrationOffsetDb: number): RadarPlan {
  return { ...radar, calibrationOffsetDb };
}

function lossFree(radar: RadarPlan): RadarPlan {
  return { ...radar, lossDbPerDeg: 0, differentialLossDbPerDeg: 0 };
}

/** Six turbines in two rows, placed by the seed, 8 to 20 km from a radar. */
function turbinesNear(radar: RadarPlan, seed: number): Turbine[] {
  const random = new RandomStream(seed + 65537);
  const azimuthRad = random.between(0, 2 * Math.PI);
  const distanceKm = random.between(10, 18);
  const xKm = radar.xKm + distanceKm * Math.sin(azimuthRad);
  const yKm = radar.yKm + distanceKm * Math.cos(azimuthRad);
  return Array.from({ length: 6 }, (_, i) => ({
    xKm: xKm + 1.5 * (i % 3) - 1.5,
    yKm: yKm + 1.8 * Math.floor(i / 3) - 0.9,
    dbz: random.between(42, 54),
  }));
}

/** A lower ridge north of the heath radar: it hides part of the lowest beam only. */
function lowRidge(radar: RadarPlan): Ridge {
  return {
    xKm: radar.xKm + 2.5,
    yKm: radar.yKm + 12,
    crestAzimuthDeg: 100,
    crestSigmaKm: 2.4,
    flankSigmaKm: 0.7,
    heightM: 150,
  };
}

/** Both radars without offset over weather of a kind, warm enough to keep the melting layer out of the low sweeps. */
function plain(kit: Kit): Omit<Parts, "planted" | "pattern"> {
  return {
    ...kit.base,
    radars: [withOffset(kit.sBand, 0), withOffset(kit.cBand, 0)],
    ridges: [],
    meltingLayer: WARM_LAYER,
    gauges: SOUND_GAUGES,
  };
}

const gentleLossWords = (kit: Kit): string =>
  `two-way loss of ${kit.sBand.lossDbPerDeg} dB (S) and ${kit.cBand.lossDbPerDeg} dB (C) per degree of PHIDP`;

function reading(offsetDb: number): string {
  if (offsetDb === 0) return "true";
  return `${Math.abs(offsetDb)} dB too ${offsetDb < 0 ? "low" : "high"}`;
}

function calibrationWorld(name: string, offsetDb: number): World {
  return {
    name,
    says: `Mixed rain; the S-band radar reads ${reading(offsetDb)}, its C-band neighbour reads true`,
    make: (kit) => ({
      ...plain(kit),
      pattern: MIXED_RAIN,
      radars: [withOffset(kit.sBand, offsetDb), withOffset(kit.cBand, 0)],
      planted: [
        `${kit.sBand.node}: ${offsetDb} dB on every reflectivity; ${kit.cBand.node}: 0 dB`,
        gentleLossWords(kit),
        GROUND_WORDS,
      ],
    }),
  };
}

/** Everything at once, each fault of a middling size. */
function mixed(kit: Kit): Parts {
  const layer: MeltingLayer =
    kit.size === "small" ? { bottomKm: 1, topKm: 1.5 } : { bottomKm: 1.9, topKm: 2.4 };
  return {
    ...plain(kit),
    pattern: MIXED_RAIN_WITH_HAIL,
    radars: [withOffset(kit.sBand, -1), { ...withOffset(kit.cBand, 1.5), lossDbPerDeg: 0.09 }],
    ridges: kit.base.ridges,
    meltingLayer: layer,
    turbines: turbinesNear(kit.sBand, kit.seed),
    interference: { node: kit.cBand.node, share: 0.2, dbzAt1Km: -16 },
    planted: [
      "attenuation: two-way loss of 0.015 dB (S) and 0.09 dB (C) per degree of PHIDP",
      "false echo: ground clutter of both radars, six wind turbines near the S-band radar, interference in a fifth of the C-band sweeps",
      `bright band: ${layerWords(layer)}`,
      "blockage: a ridge hides the lowest C-band sweep towards the west-south-west",
      "calibration: -1 dB at S band, +1.5 dB at C band",
      "hail: in the middle of the two strongest showers",
    ],
  };
}

/** The mixed world with one artefact taken out: its method must then change next to nothing. */
function without(artefact: string, says: string, change: (parts: Parts) => Parts): World {
  return {
    name: `mixed-without-${artefact}`,
    says: `The mixed world, but ${says}`,
    make: (kit) => {
      const parts = change(mixed(kit));
      const start = `${artefact.replaceAll("-", " ")}:`;
      return {
        ...parts,
        planted: [...parts.planted.filter((words) => !words.startsWith(start)), `${start} none`],
      };
    },
  };
}

/** Every world. What a world plants, and where, stands in its truth.json. */
export const WORLDS: readonly World[] = [
  {
    name: "bright-band",
    says: "Steady widespread rain under a low melting layer that the far gates of the lowest sweeps look into",
    make: (kit) => ({
      ...plain(kit),
      pattern: STEADY_RAIN,
      meltingLayer: lowLayer(kit.size),
      planted: [layerWords(lowLayer(kit.size)), gentleLossWords(kit), GROUND_WORDS],
    }),
  },
  {
    name: "blind-zone",
    says: "A line of strong showers crosses the C-band radar, which goes blind along it; an S-band radar stands beside the line",
    make: (kit) => ({
      ...plain(kit),
      pattern: lineAcross(kit.cBand),
      radars: [
        withOffset(kit.sBand, 0),
        {
          ...withOffset(kit.cBand, 0),
          lossDbPerDeg: 0.12,
          differentialLossDbPerDeg: 0.03,
          noiseDbzAt1Km: -32,
        },
      ],
      planted: [
        `${kit.cBand.node}: two-way loss of 0.12 dB per degree of PHIDP, and of ZDR 0.03 dB; noise of -32 dBZ at 1 km, so that rain behind the line vanishes`,
        `${kit.sBand.node}: two-way loss of 0.015 dB per degree of PHIDP, sees the same rain`,
        GROUND_WORDS,
      ],
    }),
  },
  {
    name: "warm-rain",
    says: "Tropical showers of many small drops that hardly move: far more rain than their echo suggests, at almost no radial velocity",
    make: (kit) => ({
      ...plain(kit),
      pattern: WARM_RAIN,
      meltingLayer: TROPICAL_LAYER,
      planted: [
        "many small drops: Nw about 32,000 m-3 mm-1 and within a factor of some 6 of it, where other worlds have 3,200",
        "showers and wind of 1.3 m/s: rain near zero velocity, which is no ground clutter",
        gentleLossWords(kit),
        GROUND_WORDS,
      ],
    }),
  },
  {
    name: "false-echo",
    says: "Light rain with strong ground clutter, wind turbines and interference: most of the strong echo is not rain",
    make: (kit) => ({
      ...plain(kit),
      pattern: LIGHT_RAIN,
      turbines: [...turbinesNear(kit.sBand, kit.seed), ...turbinesNear(kit.cBand, kit.seed + 1)],
      interference: { node: kit.cBand.node, share: 0.5, dbzAt1Km: -12 },
      planted: [
        GROUND_WORDS,
        "six wind turbines near each radar: fixed gates of 42 to 54 dBZ, unsteady, with velocity all over, 1 dB of it filtered",
        `${kit.cBand.node}: half of the sweeps have one to three rays of interference, -12 dBZ at 1 km and growing by 20 log r`,
        gentleLossWords(kit),
      ],
    }),
  },
  {
    name: "blocked-sector",
    says: "Mixed rain seen by one C-band radar alone, of which two ridges hide the lowest sweep: one all of it, one part",
    make: (kit) => ({
      ...plain(kit),
      pattern: MIXED_RAIN,
      radars: [withOffset(kit.cBand, 0)],
      ridges: [...kit.base.ridges, lowRidge(kit.cBand)],
      planted: [
        "a ridge of 240 m, 11 km west-south-west of the radar, and one of 150 m, 12 km north of it; rays and shares under planted.radars",
        `two-way loss of ${kit.cBand.lossDbPerDeg} dB per degree of PHIDP`,
        "ground clutter near the site and on the ridges",
      ],
    }),
  },
  calibrationWorld("calibration-low", -2),
  calibrationWorld("calibration-true", 0),
  calibrationWorld("calibration-high", 2),
  {
    name: "hail",
    says: "Small storms with melting hail in their middles: the strongest echo has ordinary rain below it",
    make: (kit) => ({
      ...plain(kit),
      pattern: HAIL_STORMS,
      planted: [
        "each storm carries hail of 60 to 66 dBZ in its middle, half as wide as its rain: ZDR near 0, RHOHV down by 0.07, no phase of its own; places under world.hailCores",
        "the truth counts rain alone; hail adds echo and no millimetre",
        gentleLossWords(kit),
        GROUND_WORDS,
      ],
    }),
  },
  {
    name: "gauge-faults",
    says: "Mixed rain; ten gauges have a fault each, dealt by the seed",
    make: (kit) => ({
      ...plain(kit),
      pattern: MIXED_RAIN,
      gauges: dealtFaults(kit.seed),
      planted: ["gauge faults: under planted.gaugeFaults", gentleLossWords(kit), GROUND_WORDS],
    }),
  },
  {
    name: "network-in-inches",
    says: "Mixed rain; the whole saltwater network writes inches under a header that says mm",
    make: (kit) => ({
      ...plain(kit),
      pattern: MIXED_RAIN,
      gauges: networkAtFault("saltwater", "inches-as-mm"),
      planted: ["every gauge of saltwater reads too little by 25.4", gentleLossWords(kit), GROUND_WORDS],
    }),
  },
  {
    name: "network-clock-late",
    says: "Mixed rain; the whole moor network stamps its values an hour late",
    make: (kit) => ({
      ...plain(kit),
      pattern: MIXED_RAIN,
      gauges: networkAtFault("moor", "clock-60-min-late"),
      planted: ["every gauge of moor stamps 60 minutes late", gentleLossWords(kit), GROUND_WORDS],
    }),
  },
  {
    name: "cloudburst",
    says: "Light rain, and one true cloudburst of a kilometre over a single gauge, which is not to be doubted",
    make: (kit) => {
      const gauge = lonelyGauge(kit.seed);
      return {
        ...plain(kit),
        pattern: cloudburstOver({ xKm: gauge.xKm * kit.scale, yKm: gauge.yKm * kit.scale }),
        planted: [
          `a shower of 1 km and 50 minutes stands over ${gauge.network} ${gauge.id}; every gauge is sound`,
          gentleLossWords(kit),
          GROUND_WORDS,
        ],
      };
    },
  },
  {
    name: "mixed",
    says: "Mixed rain with every artefact of the radar at once, each of a middling size",
    make: mixed,
  },
  without("attenuation", "rain takes nothing from the beam", (parts) => ({
    ...parts,
    radars: parts.radars.map(lossFree),
  })),
  without("false-echo", "with no ground clutter, turbine or interference", (parts) => {
    const { turbines: _turbines, interference: _interference, ...rest } = parts;
    return { ...rest, radars: parts.radars.map((radar) => ({ ...radar, clutterFree: true })) };
  }),
  without("bright-band", "with the melting layer far above every beam", (parts) => ({
    ...parts,
    meltingLayer: NO_LAYER_IN_REACH,
  })),
  without("blockage", "with no ridge", (parts) => ({ ...parts, ridges: [] })),
  without("calibration", "with both radars reading true", (parts) => ({
    ...parts,
    radars: parts.radars.map((radar) => withOffset(radar, 0)),
  })),
  without("hail", "with no hail", (parts) => ({ ...parts, pattern: MIXED_RAIN })),
];

/**
 * The storm of a world, ready for `generateStorm`.
 *
 * A world and a seed are frozen: `frozen.ts` holds digests of their truth, and a change of them is another world.
 *
 * @param name - one of `WORLDS`
 * @throws RangeError for a name that no world has
 */
export function worldStorm(name: string, seed: number, size: WorldSize = "small"): StormPreset {
  const world = WORLDS.find((candidate) => candidate.name === name);
  if (world === undefined) {
    throw new RangeError(`no world is called ${name}; there are ${WORLDS.map((one) => one.name).join(", ")}`);
  }
  const { planted, ...parts } = world.make(kitOf(seed, size));
  return { ...parts, seed, world: { name, says: world.says, planted } };
}

function kitOf(seed: number, size: WorldSize): Kit {
  const base = size === "small" ? SMALL : DEMO;
  const [sBand, cBand] = base.radars as [RadarPlan, RadarPlan];
  // Three sweeps, gates of 1 km and a file a round keep a small world quick to make.
  const light = size === "small";
  return {
    seed,
    size,
    scale: base.sizeKm / 160,
    base,
    sBand: light ? { ...sBand, sweeps: sBand.sweeps.slice(0, 3) } : sBand,
    cBand: light ? { ...cBand, gateM: 1000, gateCount: 50, files: "volumes" } : cBand,
  };
}
