import { InputError, type Moment, type RadarSite, type SweepHeader } from "@rainreckon/core";
import type { RayTable, SweepSource } from "../sourced-scan.ts";
import type { Cut } from "./cuts.ts";
import type { Radial, RadialMoment } from "./radial.ts";

const MAX_RAYS = 36_000;
/** A ray this far in time from the middle of its turn has a damaged clock. */
const LONGEST_TURN_MS = 600_000;
const BELOW_THRESHOLD = 0;
const RANGE_FOLDED = 1;

/** Gates that some moments of a cut share. */
interface GateLayout {
  readonly firstGateCentreM: number;
  readonly gateLengthM: number;
  gateCount: number;
  readonly quantities: Set<string>;
}

/**
 * The sweeps of one turn: one for each layout of gates, because older volumes have reflectivity in gates of 1 km and
 * velocity in gates of 250 m.
 *
 * @throws InputError where the rays cannot make a sweep
 */
export function cutSweeps(path: string, cut: Cut, site: RadarSite): readonly SweepSource[] {
  const where = `${path}, cut ${cut.elevationNumber}`;
  if (cut.radials.length > MAX_RAYS) {
    throw new InputError(`a cut of ${cut.radials.length} rays`, where, "fetch the file again");
  }
  const rays = rayTable(cut.radials);
  const times = rays.timeEpochMs.filter((time) => Number.isFinite(time));
  const elevationDeg = median(rays.elevationDeg.filter((angle) => angle >= -10 && angle <= 90));
  if (times.length === 0 || elevationDeg === undefined) {
    throw new InputError("no ray has an elevation and a time that can be", where, "fetch the file again");
  }
  const layouts = layoutsOf(cut.radials);
  if (layouts.length === 0) throw new InputError("the cut holds no moment", where, "leave it out");
  const nyquist = cut.radials.find(
    (radial) => radial.nyquistVelocityMPerS !== undefined,
  )?.nyquistVelocityMPerS;
  const remarks = cut.isWhole ? [] : [`Only a part of this turn is there: ${cut.radials.length} rays.`];
  return layouts.map((layout, index) => {
    const dataset = `cut ${cut.elevationNumber}${index === 0 ? "" : `, ${[...layout.quantities].join(" ")}`}`;
    const header: SweepHeader = {
      site,
      origin: { path, dataset },
      elevationDeg,
      rayCount: cut.radials.length,
      gateCount: layout.gateCount,
      firstGateCentreM: layout.firstGateCentreM,
      gateLengthM: layout.gateLengthM,
      startEpochMs: times.reduce((least, time) => Math.min(least, time), Number.POSITIVE_INFINITY),
      endEpochMs: times.reduce((most, time) => Math.max(most, time), Number.NEGATIVE_INFINITY),
      quantities: [...layout.quantities].sort(),
      ...(nyquist === undefined ? {} : { nyquistVelocityMPerS: nyquist }),
      remarks,
    };
    return {
      header,
      rays: () => rays,
      check: (quantity) => void coding(path, dataset, cut.radials, quantity),
      moment: (quantity) => assemble(path, dataset, cut.radials, quantity, layout.gateCount),
    };
  });
}

function rayTable(radials: readonly Radial[]): RayTable {
  const times = Float64Array.from(radials, ({ epochMs }) => epochMs);
  const middle = median(times) as number;
  return {
    azimuthDeg: Float64Array.from(radials, ({ azimuthDeg }) => azimuthDeg),
    elevationDeg: Float64Array.from(radials, ({ elevationDeg }) => elevationDeg),
    timeEpochMs: times.map((time) => (Math.abs(time - middle) <= LONGEST_TURN_MS ? time : Number.NaN)),
  };
}

function median(values: Float64Array): number | undefined {
  return values.toSorted()[Math.floor(values.length / 2)];
}

function layoutsOf(radials: readonly Radial[]): readonly GateLayout[] {
  const layouts = new Map<string, GateLayout>();
  const layoutOf = new Map<string, string>();
  for (const { moments } of radials) {
    for (const { quantity, firstGateCentreM, gateLengthM, gateCount } of moments) {
      const key = `${firstGateCentreM} ${gateLengthM}`;
      // A quantity has one layout in a turn: rays that tell of another are found when it is read.
      const known = layoutOf.get(quantity);
      if (known !== undefined && known !== key) continue;
      layoutOf.set(quantity, key);
      const layout = layouts.get(key) ?? {
        firstGateCentreM,
        gateLengthM,
        gateCount: 0,
        quantities: new Set(),
      };
      layouts.set(key, layout);
      layout.gateCount = Math.max(layout.gateCount, gateCount);
      layout.quantities.add(quantity);
    }
  }
  // Reflectivity first, where it is: it is what rain is made from.
  return [...layouts.values()]
    .filter(({ gateCount }) => gateCount > 0)
    .sort((a, b) => Number(b.quantities.has("DBZH")) - Number(a.quantities.has("DBZH")));
}

/** Scale, word length and layout of a quantity, which all rays of a turn must share. */
function coding(path: string, dataset: string, radials: readonly Radial[], quantity: string): RadialMoment {
  let first: RadialMoment | undefined;
  for (const [ray, { moments }] of radials.entries()) {
    const moment = moments.find((candidate) => candidate.quantity === quantity);
    if (moment === undefined) continue;
    first ??= moment;
    for (const key of ["scale", "offset", "wordBytes", "firstGateCentreM", "gateLengthM"] as const) {
      if (moment[key] === first[key]) continue;
      throw new InputError(
        `rays of one turn differ in the ${key} of ${quantity}: ${first[key]} and, at ray ${ray + 1}, ${moment[key]}`,
        `${path}, ${dataset}`,
        "fetch the file again, or leave it out",
      );
    }
  }
  return first as RadialMoment;
}

function assemble(
  path: string,
  dataset: string,
  radials: readonly Radial[],
  quantity: string,
  gateCount: number,
): Moment {
  const { scale, offset, wordBytes } = coding(path, dataset, radials, quantity);
  const Kind = wordBytes === 2 ? Uint16Array : Uint8Array;
  // Gates beyond a ray's last, and rays without this quantity, were not observed, as range-folded ones.
  const stored = new Kind(radials.length * gateCount).fill(RANGE_FOLDED);
  radials.forEach(({ moments }, ray) => {
    const codes = moments.find((moment) => moment.quantity === quantity)?.codes;
    if (codes === undefined) return;
    if (wordBytes === 1) stored.set(codes.subarray(0, gateCount), ray * gateCount);
    else {
      const count = Math.min(gateCount, codes.length / 2);
      for (let gate = 0; gate < count; gate++) stored[ray * gateCount + gate] = codes.readUInt16BE(2 * gate);
    }
  });
  return {
    quantity,
    stored,
    gain: 1 / scale,
    offset: -offset / scale,
    nodata: RANGE_FOLDED,
    undetect: BELOW_THRESHOLD,
  };
}
