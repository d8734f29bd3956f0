import { describe, expect, test } from "vitest";
import { equalAreaPlane } from "./earth.ts";
import { lonelyGauge, SOUND_GAUGES } from "./gauge-worlds.ts";
import { GAUGES, recordGauges, writeGauges } from "./gauges.ts";
import { DISTRICT_CENTRE, weatherShape } from "./generate.ts";
import { weatherLattice } from "./grids.ts";
import { interferenceRays } from "./interference.ts";
import type { StormPreset } from "./presets.ts";
import {
  codingOf,
  emptySweepTruth,
  GATE_FLAGS,
  measureSweep,
  RAY_COUNT,
  type RadarPlan,
  type SweepExtras,
  sweepGeometry,
} from "./radar.ts";
import { noiseTable, RandomStream } from "./random.ts";
import { emptyMoment, type Lattice, type Moment, Weather } from "./weather.ts";
import { REPORT_SEEDS, TUNING_SEEDS, WORLDS, worldStorm } from "./worlds.ts";

const plane = equalAreaPlane(DISTRICT_CENTRE);
const table = noiseTable(new RandomStream(5));

/** Weather that worlds of one seed share is worked out once: it takes most of the time. */
const weathers = new Map<string, Weather>();
function sharedWeather(storm: StormPreset, lattice: Lattice): Weather {
  const shape = weatherShape(storm, lattice);
  const { cells, ...pattern } = storm.pattern!;
  // Places of showers may depend on the world: what cells a seed gives is part of the key.
  const showers = JSON.stringify(cells(new RandomStream(storm.seed), shape));
  const key = JSON.stringify([storm.seed, lattice, pattern, showers]);
  const known = weathers.get(key) ?? new Weather(new RandomStream(storm.seed), shape);
  weathers.set(key, known);
  return known;
}

/** A world held in memory: its weather, and what its radars would measure at a minute. */
function scene(name: string, seed = 1) {
  const storm = worldStorm(name, seed);
  const lattice = weatherLattice(storm.sizeKm, storm.radars);
  const weather = sharedWeather(storm, lattice);
  const momentAt = (minute: number): Moment =>
    weather.fill(lattice, emptyMoment(lattice, minute, weather.drift), true);
  const sBand = storm.radars.find(({ band }) => band === "S");
  const cBand = storm.radars.find(({ band }) => band === "C")!;
  const look = (radar: RadarPlan, elevationDeg: number, moment: Moment, extras: SweepExtras = {}) => {
    const geometry = sweepGeometry(
      radar,
      elevationDeg,
      plane,
      storm.ridges,
      storm.meltingLayer,
      storm.turbines,
    );
    const truth = emptySweepTruth(radar);
    const startMinute = moment.minute - radar.sweepSeconds / 120;
    const moments = measureSweep(
      radar,
      geometry,
      lattice,
      moment,
      startMinute,
      { table, start: 3 },
      { ...extras, truth },
    );
    return { geometry, truth, moments };
  };
  return { storm, lattice, weather, momentAt, sBand: sBand!, cBand, look };
}

function flagged(flags: Uint8Array, flag: number): number[] {
  return [...flags.keys()].filter((index) => (flags[index]! & flag) !== 0);
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

test("every world has a name of its own, says what it is, and what is planted", () => {
  expect(new Set(WORLDS.map(({ name }) => name)).size).toBe(WORLDS.length);
  for (const { name, says } of WORLDS) {
    const { world } = worldStorm(name, 1);
    expect(says.length).toBeGreaterThan(20);
    expect(world?.planted.length).toBeGreaterThan(0);
  }
  expect(() => worldStorm("calm", 1)).toThrow(/no world is called calm/);
});

test("no seed is for both tuning and reporting", () => {
  expect(TUNING_SEEDS).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9, 10]);
  expect(REPORT_SEEDS).toHaveLength(20);
  expect(REPORT_SEEDS.filter((seed) => TUNING_SEEDS.includes(seed))).toEqual([]);
});

describe("blind-zone", () => {
  const { lattice, momentAt, look, cBand, sBand } = scene("blind-zone");
  const moment = momentAt(60);
  const c = look(cBand, 0.5, moment);

  // By hand: 10 km of KDP 4 deg/km at 0.12 dB/deg is 2 * 10 * 4 * 0.12 = 9.6 dB two-way; PHIDP rises by 80 deg.
  test("10 km of KDP 4 deg/km cost 9.6 dB two-way, and no more behind", () => {
    const wall = emptyMoment(lattice, 0.5, { xKmPerMinute: 0, yKmPerMinute: 0 });
    wall.zMm6PerM3.fill(1000);
    const east = (column: number): number => lattice.westKm + column - cBand.xKm;
    wall.phaseTimesWavelength.forEach((_, cell) => {
      const xKm = east(cell % lattice.nx);
      if (xKm > 15 && xKm < 25) wall.phaseTimesWavelength[cell] = 4 * cBand.wavelengthM;
    });
    const { truth } = look(cBand, 0.5, wall);
    const lossAt = (rangeKm: number): number => truth.lossDb[90 * cBand.gateCount + rangeKm]!;
    expect(lossAt(13)).toBe(0);
    expect(Math.abs(lossAt(20) - lossAt(30) / 2)).toBeLessThan(1);
    expect(Math.abs(lossAt(30) - 9.6)).toBeLessThan(0.02);
    expect(lossAt(45)).toBe(lossAt(30));
  });

  test("the loss at the end of the worst ray is twice the specific attenuation summed along it", () => {
    const { truth, geometry } = c;
    const ends = Array.from(
      { length: RAY_COUNT },
      (_, ray) => truth.lossDb[(ray + 1) * cBand.gateCount - 1]!,
    );
    const worst = ends.indexOf(Math.max(...ends));
    let twoWayDb = 0;
    for (let gate = 0; gate < cBand.gateCount; gate++) {
      const index = worst * cBand.gateCount + gate;
      const column = Math.round(geometry.xKm[index]! - lattice.westKm);
      const row = Math.round(geometry.yKm[index]! - lattice.southKm);
      const kdp = moment.phaseTimesWavelength[row * lattice.nx + column]! / cBand.wavelengthM;
      const last = gate === cBand.gateCount - 1;
      twoWayDb += 2 * cBand.lossDbPerDeg * kdp * (cBand.gateM / 1000) * (last ? 0.5 : 1);
    }
    expect(ends[worst]).toBeGreaterThan(20);
    // The ray's own time is up to 10 s off the moment's: the line has then moved by less than 0.1 km.
    expect(Math.abs(ends[worst]! / twoWayDb - 1)).toBeLessThan(0.05);
  });

  test("somewhere rain above 1 mm/h is not seen at C band, and every such gate at S band is", () => {
    const missed = ({ truth, moments }: typeof c): number =>
      moments.DBZH.filter((code, index) => code === 0 && truth.rateMmPerHour[index]! > 1).length;
    const all = [45, 60, 75].map((minute) => momentAt(minute));
    expect(all.reduce((sum, at) => sum + missed(look(cBand, 0.5, at)), 0)).toBeGreaterThan(20);
    expect(all.reduce((sum, at) => sum + missed(look(sBand, 0.5, at)), 0)).toBe(0);
  });
});

describe("bright-band", () => {
  const { storm, momentAt, look, sBand } = scene("bright-band");
  const near = look({ ...sBand, gateM: 200, gateCount: 100 }, 4, momentAt(60));
  const layer = storm.meltingLayer;

  test("seen from near, the echo peaks in the middle of the layer", () => {
    const { widespreadFactor, heightKm } = near.geometry;
    const peak = widespreadFactor.indexOf(Math.max(...widespreadFactor));
    expect(Math.abs(heightKm[peak]! - (layer.bottomKm + layer.topKm) / 2)).toBeLessThan(0.03);
  });

  // By hand: the layer's 6 dB fall by 24 dB/km to both sides. At 11 km a beam of 1 degree is 0.19 km wide and
  // its two-way weight has a deviation of 0.19 / sqrt(16 ln 2) = 0.058 km, so the mean distance from the
  // middle is 0.058 sqrt(2 / pi) = 0.046 km and the mean loss 1.1 dB: an excess of some 4.9 dB.
  test("at 11 km the beam leaves 4.9 dB of the layer's 6 dB", () => {
    const { widespreadFactor, heightKm } = near.geometry;
    const peak = widespreadFactor.indexOf(Math.max(...widespreadFactor));
    expect(Math.abs(heightKm[peak]! - 0.062 - 11 * Math.sin((4 * Math.PI) / 180))).toBeLessThan(0.05);
    expect(Math.abs(10 * Math.log10(widespreadFactor[peak]!) - 4.9)).toBeLessThan(0.2);
  });

  test("the lowest sweep looks into the layer at its far gates, and only there", () => {
    const { truth } = look(sBand, 0.5, momentAt(60));
    const gates = flagged(truth.flags, GATE_FLAGS.melting).map((index) => index % sBand.gateCount);
    expect(gates.length).toBeGreaterThan(0);
    expect(Math.min(...gates)).toBeGreaterThan(35);
  });
});

describe("hail", () => {
  const { weather, lattice, momentAt, look, sBand } = scene("hail");
  const core = weather.cells[0]!;
  const moment = momentAt(core.midMinute);
  const row = Math.round(core.yKm - lattice.southKm);
  const cell = row * lattice.nx + Math.round(core.xKm - lattice.westKm);

  test("the core at its height echoes what was planted, within the dB that a lattice of 1 km may miss it by", () => {
    const dbz = 10 * Math.log10(moment.zMm6PerM3[cell]!);
    expect(core.hailDbz).toBeGreaterThanOrEqual(60);
    expect(dbz).toBeGreaterThan(core.hailDbz! - 1.5);
    expect(dbz).toBeLessThan(core.hailDbz! + 0.5);
    expect(moment.hailShare[cell]).toBeGreaterThan(0.9);
  });

  // By hand: (10^6 / 200)^(1/1.6) = 205 mm/h.
  test("200/1.6 would make 205 mm/h of 60 dBZ; less than half of that falls", () => {
    expect(moment.rateMmPerHour[cell]).toBeGreaterThan(10);
    expect(moment.rateMmPerHour[cell]).toBeLessThan(205 / 2);
  });

  test("gates of hail have ZDR near 0 and a low RHOHV; heavy rain beside them has neither", () => {
    const { truth, moments, geometry } = look(sBand, 0.5, moment);
    const zdr = codingOf("ZDR", sBand);
    const rho = codingOf("RHOHV", sBand);
    const clean = (index: number): boolean => geometry.clutterZ[index] === 0 && moments.DBZH[index] !== 0;
    const hail = flagged(truth.flags, GATE_FLAGS.hail).filter(clean);
    const rain = [...truth.rateMmPerHour.keys()].filter(
      (index) => truth.rateMmPerHour[index]! > 10 && truth.flags[index] === 0 && clean(index),
    );
    const zdrOf = (gates: number[]): number =>
      mean(gates.map((i) => moments.ZDR[i]! * zdr.gain + zdr.offset));
    const rhoOf = (gates: number[]): number =>
      mean(gates.map((i) => moments.RHOHV[i]! * rho.gain + rho.offset));
    expect(hail.length).toBeGreaterThan(30);
    expect(rain.length).toBeGreaterThan(30);
    expect(zdrOf(hail)).toBeLessThan(0.5);
    expect(zdrOf(rain)).toBeGreaterThan(1);
    expect(rhoOf(hail)).toBeLessThan(0.95);
    expect(rhoOf(rain)).toBeGreaterThan(0.97);
  });
});

describe("false-echo", () => {
  const { storm, momentAt, look, cBand } = scene("false-echo", 2);

  test("turbines stand in the same gates at every minute, are seen without rain, and the filter leaves them", () => {
    const looks = [20, 80].map((minute) => look(cBand, 0.5, momentAt(minute)));
    const gates = looks.map(({ truth }) => flagged(truth.flags, GATE_FLAGS.turbine));
    expect(gates[0]!.length).toBeGreaterThanOrEqual(5);
    expect(gates[1]).toEqual(gates[0]);
    const z = codingOf("DBZH", cBand);
    for (const { moments } of looks) {
      for (const gate of gates[0]!) {
        expect(moments.DBZH[gate]! * z.gain + z.offset).toBeGreaterThan(20);
        expect(moments.TH[gate]! - moments.DBZH[gate]!).toBeLessThanOrEqual(1.25 / z.gain);
      }
    }
  });

  // 20 log10(40/10) = 12.04 dB: what feigns an echo of one power at every range grows as the noise limit does.
  test("a ray of interference grows by 12 dB from 10 to 40 km, in its own ray only", () => {
    const dry = emptyMoment(weatherLattice(storm.sizeKm, storm.radars), 0.5);
    const radar = { ...cBand, clutterFree: true };
    const { moments, truth } = look(radar, 3, dry, { spikeRays: [77], spikeDbzAt1Km: -12 });
    const z = codingOf("DBZH", radar);
    const around = (gate: number): number =>
      mean(
        [-2, -1, 0, 1, 2].map(
          (step) => moments.DBZH[77 * radar.gateCount + gate + step]! * z.gain + z.offset,
        ),
      );
    expect(Math.abs(around(39) - around(9) - 12.04 + 0.17)).toBeLessThan(1.6);
    const rays = new Set(
      flagged(truth.flags, GATE_FLAGS.interference).map((index) => Math.floor(index / radar.gateCount)),
    );
    expect([...rays]).toEqual([77]);
  });

  test("half of the sweeps are hit, by one to three rays side by side", () => {
    const hits = Array.from({ length: 2000 }, (_, sweep) => interferenceRays(storm.interference!, 4, sweep));
    const hit = hits.filter((rays) => rays.length > 0);
    // A binomial share of 2000 draws has a deviation of sqrt(0.25 / 2000) = 0.011.
    expect(Math.abs(hit.length / 2000 - 0.5)).toBeLessThan(0.045);
    expect(hit.every((rays) => rays.length <= 3)).toBe(true);
    expect(hit.every((rays) => rays.every((ray, i) => ray === (rays[0]! + i) % RAY_COUNT))).toBe(true);
  });
});

test("blocked-sector: one sector lost, another in part, and the sweep above hardly touched", () => {
  const { momentAt, look, cBand } = scene("blocked-sector");
  const moment = momentAt(60);
  const lost = (elevationDeg: number): number[] => {
    const { open } = look(cBand, elevationDeg, moment).geometry;
    return Array.from({ length: RAY_COUNT }, (_, ray) => 1 - open[(ray + 1) * cBand.gateCount - 1]!);
  };
  const low = lost(0.5);
  expect(Math.max(...low.slice(240, 258))).toBeGreaterThan(0.95);
  const part = Math.max(...low.slice(0, 30));
  expect(part).toBeGreaterThan(0.3);
  expect(part).toBeLessThan(0.9);
  expect(Math.max(...lost(1.4))).toBeLessThan(0.2);
});

test.each([
  ["calibration-low", -2],
  ["calibration-true", 0],
  ["calibration-high", 2],
])("%s: the S-band radar reads %d dB beside one that reads true, in the same rain", (name, offsetDb) => {
  const { sBand, momentAt, look } = scene(name);
  const moment = momentAt(60);
  const z = codingOf("DBZH", sBand);
  const shown = look(sBand, 0.5, moment);
  const sound = look({ ...sBand, calibrationOffsetDb: 0 }, 0.5, moment);
  const gates = [...shown.moments.DBZH.keys()].filter((i) => sound.moments.DBZH[i]! > 0);
  const difference = mean(gates.map((i) => (shown.moments.DBZH[i]! - sound.moments.DBZH[i]!) * z.gain));
  expect(Math.abs(difference - offsetDb)).toBeLessThan(0.05);
});

// At one rain rate Z goes as Nw^(1 - 7/4.67) = Nw^-0.499 (Testud et al., 2001, with the fall speeds of
// drops.ts): ten times as many drops as in the other worlds echo 5.0 dB less.
test("warm-rain: its drops echo 5 dB less than those of other worlds for the same rain", () => {
  const { storm, lattice } = scene("warm-rain");
  const zOf = (dropNumberFactor: number): number => {
    const pattern = { ...storm.pattern!, dropNumberFactor };
    const weather = new Weather(new RandomStream(1), weatherShape({ ...storm, pattern }, lattice));
    const moment = weather.fill(lattice, emptyMoment(lattice, 60, weather.drift), true);
    const wettest = moment.rateMmPerHour.indexOf(Math.max(...moment.rateMmPerHour));
    return moment.zMm6PerM3[wettest]!;
  };
  const others = worldStorm("bright-band", 1).pattern!.dropNumberFactor;
  expect(storm.pattern!.dropNumberFactor / others).toBeCloseTo(10, 12);
  expect(10 * Math.log10(zOf(others) / zOf(storm.pattern!.dropNumberFactor))).toBeCloseTo(5, 1);
});

test("a mixed world without an artefact has none of it, and all the rest", () => {
  const seen = (name: string) => {
    const { storm, weather, momentAt, look, cBand } = scene(name);
    const moment = momentAt(60);
    const { truth, geometry } = look(cBand, 0.5, moment, { spikeRays: storm.interference ? [7] : [] });
    const steep = look(cBand, 3, moment);
    return {
      attenuation: truth.lossDb.some((loss) => loss > 0.5),
      "false-echo":
        geometry.clutterZ.some((z) => z > 0) && flagged(truth.flags, GATE_FLAGS.interference).length > 0,
      "bright-band": flagged(steep.truth.flags, GATE_FLAGS.melting).length > 0,
      blockage: flagged(truth.flags, GATE_FLAGS.blocked).length > 0,
      calibration: storm.radars.some(({ calibrationOffsetDb }) => calibrationOffsetDb !== 0),
      hail: weather.cells.some(({ hailDbz }) => hailDbz !== undefined),
    };
  };
  const everything = {
    attenuation: true,
    "false-echo": true,
    "bright-band": true,
    blockage: true,
    calibration: true,
    hail: true,
  };
  expect(seen("mixed")).toEqual(everything);
  for (const artefact of Object.keys(everything)) {
    expect(seen(`mixed-without-${artefact}`)).toEqual({ ...everything, [artefact]: false });
  }
});

describe("gauges", () => {
  const read = (name: string, seed: number) => {
    const { storm, weather } = scene(name, seed);
    const records = recordGauges(
      weather,
      new RandomStream(seed),
      plane,
      storm.sizeKm,
      storm.minutes,
      storm.gauges,
    );
    return { records, files: writeGauges(records, plane, storm.startEpochMs, () => 0) };
  };
  const depth = (trueMm: Float64Array): number => trueMm.reduce((sum, mm) => sum + mm, 0);

  test("network-in-inches: all that saltwater wrote, times 25.4, is what fell, and moor reads true", () => {
    const { records, files } = read("network-in-inches", 3);
    const fell = (network: string): number =>
      records
        .filter(({ plan }) => plan.network === network)
        .reduce((sum, { trueMm }) => sum + depth(trueMm), 0);
    const saltwater = files.saltwater
      .trim()
      .split("\n")
      .slice(1)
      .flatMap((line) => line.split(",").slice(1).map(Number))
      .reduce((sum, value) => sum + value, 0);
    const moor = files.moor
      .trim()
      .split("\n")
      .slice(1)
      .reduce((sum, line) => sum + Number(line.split(",")[2]), 0);
    // Tips of 0.2 mm at eleven gauges, 2 % of their own, and up to 12 % lost in the heaviest rain.
    expect(Math.abs((saltwater * 25.4) / fell("saltwater") - 0.97)).toBeLessThan(0.06);
    expect(Math.abs(moor / fell("moor") - 0.97)).toBeLessThan(0.06);
    expect(files.faults).toHaveLength(11);
  });

  test("network-clock-late: every stamp of moor is an hour on, those of saltwater are not", () => {
    const { files } = read("network-clock-late", 1);
    expect(files.moor.split("\n")[1]).toContain("2031-05-20T13:05:00Z");
    expect(files.saltwater.split("\n")[1]).toMatch(/^2031-05-20 13:10,/);
  });

  test("cloudburst: one gauge alone has it, none has a fault, and the radar sees it above that gauge", () => {
    const seed = 4;
    const { records, files } = read("cloudburst", seed);
    const gauge = lonelyGauge(seed);
    const depths = records.map(({ trueMm }) => depth(trueMm));
    const hit = records.findIndex(({ plan }) => plan.id === gauge.id);
    expect(files.faults).toEqual([]);
    // By hand: at least 90 mm/h at its height, half of that on the mean over 50 minutes, makes 37 mm.
    expect(depths[hit]).toBeGreaterThan(37);
    expect(Math.max(...depths.filter((_, i) => i !== hit))).toBeLessThan(10);
    const { weather, momentAt, look, sBand } = scene("cloudburst", seed);
    const { moments, geometry } = look(sBand, 0.5, momentAt(weather.cells[0]!.midMinute));
    const { xKm, yKm } = records[hit]!;
    const above = [...moments.DBZH.keys()].filter(
      (i) => Math.hypot(geometry.xKm[i]! - xKm, geometry.yKm[i]! - yKm) < 1,
    );
    const z = codingOf("DBZH", sBand);
    expect(Math.max(...above.map((i) => moments.DBZH[i]! * z.gain + z.offset))).toBeGreaterThan(42);
  });

  test("gauge-faults: ten faults, at other gauges for another seed, and at most one a gauge", () => {
    const faulty = (seed: number): string[] =>
      worldStorm("gauge-faults", seed)
        .gauges!.filter(({ fault }) => fault !== undefined)
        .map(({ network, id, fault }) => `${network} ${id} ${fault}`);
    expect(faulty(1)).toHaveLength(10);
    expect(new Set(faulty(1).map((words) => words.split(" ")[2])).size).toBe(10);
    expect(faulty(2)).not.toEqual(faulty(1));
    expect(worldStorm("gauge-faults", 1).gauges).toHaveLength(SOUND_GAUGES.length);
    expect(SOUND_GAUGES).toHaveLength(GAUGES.length - 1);
  });

  test("a partly blocked gauge writes a third of its tips, a misplaced one stands 0.2 degrees east of itself", () => {
    const { records, files } = read("gauge-faults", 5);
    const blocked = records.find(({ plan }) => plan.fault === "partly-blocked")!;
    const written = files.moor
      .split("\n")
      .filter((line) => line.startsWith(`${blocked.plan.id},`))
      .reduce((sum, line) => sum + Number(line.split(",")[2]), 0);
    expect(blocked.tipSeconds.length).toBeGreaterThan(9);
    expect(Math.abs(written / (blocked.tipSeconds.length * 0.2) - 1 / 3)).toBeLessThan(0.1);
    const misplaced = records.find(({ plan }) => plan.fault === "misplaced")!;
    const station = files.moorStations
      .split("\n")
      .find((line) => line.startsWith(`${misplaced.plan.id},`))!
      .split(",");
    expect(Number(station[2]) - misplaced.place.lonDeg).toBeCloseTo(0.2, 4);
  });
});
