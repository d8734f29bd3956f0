import { beamHeightM, effectiveRadiusM } from "../../beam.ts";
import { echoOf, noiseOf } from "../blockage/echo-fixture.ts";
import type { PolarEcho } from "../polar-echo.ts";
import { profileDb, type VerticalProfile } from "./vertical-profile.ts";

/** For tests: rain over a radar, as it is at the ground and as beams see it. */
export interface LayeredRain {
  readonly profile: VerticalProfile;
  /** By how much RHOHV falls in the layer; undefined leaves the moment out. */
  readonly rhohvDrop?: number;
  /** By how much RHOHV falls in each km of range. */
  readonly rhohvPerKm?: number;
  readonly beamWidthDeg?: number;
  readonly antennaHeightM?: number;
  readonly elevationsDeg?: readonly number[];
  readonly gateCount?: number;
  readonly gateLengthM?: number;
}

/** Mean over a beam by its definition: 121 heights within four sigmas each way, weights exp(-8 ln2 (dh / r theta)²). */
export function overBeam(of: (heightM: number) => number, centreM: number, diameterM: number): number {
  let sum = 0;
  let weights = 0;
  for (let step = -60; step <= 60; step++) {
    const offset = (step / 60) * 1.2;
    const weight = Math.exp(-8 * Math.LN2 * offset * offset);
    sum += weight * of(centreM + offset * diameterM);
    weights += weight;
  }
  return sum / weights;
}

/** Rain at the ground, dBZ: broad patches of 15 to 31 dBZ that drift with the round. */
export function groundDbz(ray: number, rangeKm: number, round: number): number {
  return 23 + 8 * Math.sin(ray / 9 + rangeKm / 9 + round / 5) * Math.cos(ray / 23 - rangeKm / 14);
}

/** Rays of 2 degrees. */
const RAY_COUNT = 180;

/** A round of sweeps, lowest first. */
export function roundOf(rain: LayeredRain, round: number): PolarEcho[] {
  const {
    profile,
    rhohvDrop,
    rhohvPerKm = 0,
    beamWidthDeg = 1,
    antennaHeightM = 100,
    elevationsDeg = [0.5, 1.5, 3, 5],
    gateCount = 50,
    gateLengthM = 1000,
  } = rain;
  const noise = noiseOf(round + 1);
  return elevationsDeg.map((elevationDeg, k) => {
    const inDb: number[] = [];
    const inLayer: number[] = [];
    for (let gate = 0; gate < gateCount; gate++) {
      const rangeM = (gate + 0.5) * gateLengthM;
      const centreM = antennaHeightM + beamHeightM(rangeM, elevationDeg, effectiveRadiusM());
      const diameterM = (rangeM * beamWidthDeg * Math.PI) / 180;
      const linear = (heightM: number) => 10 ** (profileDb(profile, heightM) / 10);
      inDb.push(10 * Math.log10(overBeam(linear, centreM, diameterM)));
      const within = (heightM: number) => (heightM > profile.bottomM && heightM < profile.topM ? 1 : 0);
      inLayer.push(overBeam(within, centreM, diameterM));
    }
    const made = echoOf({
      elevationDeg,
      rayCount: RAY_COUNT,
      gateCount,
      gateLengthM,
      startEpochMs: round * 300_000 + k * 30_000,
      dbz: (ray, gate) =>
        groundDbz(ray, ((gate + 0.5) * gateLengthM) / 1000, round) + (inDb[gate] as number) + 0.7 * noise(),
      ...(rhohvDrop === undefined
        ? {}
        : {
            rhohv: (_, gate) =>
              0.99 -
              rhohvDrop * (inLayer[gate] as number) -
              (rhohvPerKm * (gate + 0.5) * gateLengthM) / 1000 +
              0.005 * noise(),
          }),
    });
    const { header } = made;
    return {
      ...made,
      header: {
        ...header,
        site: { ...header.site, antennaHeightM },
        beamWidthDeg: { horizontal: beamWidthDeg, vertical: beamWidthDeg },
      },
    };
  });
}

/** Rounds that follow one another. */
export function roundsOf(rain: LayeredRain, count: number): PolarEcho[][] {
  return Array.from({ length: count }, (_, round) => roundOf(rain, round));
}
