import { InputError, type RadarSite, type SweepHeader } from "@rainreckon/core";
import type { DatasetShape } from "../../hdf5/index.ts";
import type { LevelAttributes } from "./levels.ts";
import { odimEpochMs } from "./times.ts";

const MAX_RAYS = 36_000;
const MAX_GATES = 100_000;
const LONGEST_GATE_M = 20_000;
/** A first gate farther away than this, in km, can only be a distance in metres. */
const FARTHEST_START_KM = 200;
/** No antenna takes an hour for one turn. */
const LONGEST_SWEEP_MS = 3_600_000;
const SPEED_OF_LIGHT_M_PER_S = 299_792_458;

/** Everything that a header needs from outside the dataset's own attributes. */
export interface HeaderSource {
  readonly site: RadarSite;
  readonly origin: SweepHeader["origin"];
  readonly quantities: readonly string[];
  /** Shape of the first array, asked only where the attributes do not say how many rays and gates there are. */
  readonly firstShape: () => DatasetShape | undefined;
}

/**
 * The header of one sweep.
 *
 * @throws InputError naming the dataset, where something that every figure depends on is missing or impossible
 */
export function sweepHeader(attributes: LevelAttributes, source: HeaderSource): SweepHeader {
  const remarks: string[] = [];
  const where = `${source.origin.path}, ${source.origin.dataset}`;
  const elevationDeg = attributes.number("where", "elangle");
  if (elevationDeg === undefined) {
    throw new InputError("the sweep has no elevation", where, "add where/elangle in degrees");
  }
  if (!(elevationDeg >= -10 && elevationDeg <= 90)) {
    throw new InputError(
      `the elevation is ${elevationDeg} degrees`,
      where,
      "where/elangle must lie between -10 and 90",
    );
  }
  return {
    site: source.site,
    origin: source.origin,
    elevationDeg,
    ...size(attributes, source, where, remarks),
    ...ranges(attributes, where, remarks),
    ...times(attributes, where, remarks),
    quantities: source.quantities,
    ...optional("wavelengthM", wavelengthM(attributes, remarks)),
    ...optional("beamWidthDeg", beamWidthDeg(attributes, remarks)),
    ...optional("nyquistVelocityMPerS", within(attributes, "NI", 0.1, 1000, "m/s", remarks)),
    ...optional(
      "radarConstantDb",
      attributes.number("how", "radconstH") ?? attributes.number("how", "radarconstH"),
    ),
    ...optional("noiseEquivalentDbz", attributes.number("how", "NEZ")),
    ...optional("gasAttenuationDbPerKm", attributes.number("how", "gasattn")),
    remarks,
  };
}

/** A property only where there is a value for it. */
function optional<K extends string, V>(key: K, value: V | undefined): { readonly [P in K]?: V } {
  return value === undefined ? {} : ({ [key]: value } as { readonly [P in K]: V });
}

function size(
  attributes: LevelAttributes,
  source: HeaderSource,
  where: string,
  remarks: string[],
): Pick<SweepHeader, "rayCount" | "gateCount"> {
  let rayCount = attributes.number("where", "nrays");
  let gateCount = attributes.number("where", "nbins");
  if (rayCount === undefined || gateCount === undefined) {
    const shape = source.firstShape()?.shape;
    rayCount ??= shape?.[0];
    gateCount ??= shape?.[1];
    remarks.push(
      "The file does not say how many rays and gates there are; the array's own shape stands for it.",
    );
  }
  const counts = [
    ["rays", rayCount, MAX_RAYS],
    ["gates", gateCount, MAX_GATES],
  ] as const;
  for (const [what, count, most] of counts) {
    if (!(count !== undefined && Number.isInteger(count) && count >= 1 && count <= most)) {
      throw new InputError(`the sweep claims ${count} ${what}`, where, `it must have 1 to ${most}`);
    }
  }
  return { rayCount: rayCount as number, gateCount: gateCount as number };
}

/** Ranges: ODIM_H5 gives the start of the first gate in km and the gate length in m. */
function ranges(
  attributes: LevelAttributes,
  where: string,
  remarks: string[],
): Pick<SweepHeader, "firstGateCentreM" | "gateLengthM"> {
  const gateLengthM = attributes.number("where", "rscale");
  if (gateLengthM === undefined || !(gateLengthM > 0 && gateLengthM <= LONGEST_GATE_M)) {
    throw new InputError(
      gateLengthM === undefined ? "the sweep has no gate length" : `the gate length is ${gateLengthM} m`,
      where,
      `where/rscale must be above 0 and at most ${LONGEST_GATE_M} m`,
    );
  }
  const startKm = attributes.number("where", "rstart");
  if (startKm === undefined)
    remarks.push("The file does not say where the first gate begins; it is taken to begin at the antenna.");
  let startM = (startKm ?? 0) * 1000;
  if (startKm !== undefined && startKm > FARTHEST_START_KM) {
    remarks.push(
      `The first gate begins at ${startKm}, which as km is beyond any radar; it is taken as metres.`,
    );
    startM = startKm;
  }
  // A first gate may be centred on the antenna, so that half of it lies behind.
  if (!(startM >= -gateLengthM && startM <= FARTHEST_START_KM * 1000)) {
    throw new InputError(`the first gate begins at ${startKm} km`, where, "correct where/rstart");
  }
  return { firstGateCentreM: startM + gateLengthM / 2, gateLengthM };
}

function times(
  attributes: LevelAttributes,
  where: string,
  remarks: string[],
): Pick<SweepHeader, "startEpochMs" | "endEpochMs"> {
  const start = instant(attributes, "startdate", "starttime", where);
  const end = instant(attributes, "enddate", "endtime", where);
  const nominal =
    start === undefined || end === undefined ? instant(attributes, "date", "time", where) : undefined;
  const startEpochMs = start ?? end ?? nominal;
  if (startEpochMs === undefined) {
    throw new InputError(
      "the sweep has no time",
      where,
      "add what/startdate, starttime, enddate and endtime",
    );
  }
  const endEpochMs = end ?? startEpochMs;
  if (start === undefined && end === undefined) {
    remarks.push("The sweep has no times of its own; the file's nominal time stands for them.");
  } else if (start === undefined || end === undefined) {
    remarks.push(`The sweep has no ${start === undefined ? "start" : "end"}; it is taken to last no time.`);
  }
  if (endEpochMs < startEpochMs || endEpochMs - startEpochMs > LONGEST_SWEEP_MS) {
    const [from, to] = [startEpochMs, endEpochMs].map((epochMs) => new Date(epochMs).toISOString());
    throw new InputError(
      `the sweep runs from ${from} to ${to}`,
      where,
      "a sweep ends after it starts and within an hour: correct its start and end",
    );
  }
  return { startEpochMs, endEpochMs };
}

function instant(
  attributes: LevelAttributes,
  dateName: string,
  timeName: string,
  where: string,
): number | undefined {
  const date = attributes.text("what", dateName);
  const time = attributes.text("what", timeName);
  if (date === undefined || time === undefined) return undefined;
  const epochMs = odimEpochMs(date, time);
  if (epochMs !== undefined) return epochMs;
  throw new InputError(
    `"${date.slice(0, 20)}" and "${time.slice(0, 20)}" are no date and time`,
    where,
    `what/${dateName} must be YYYYMMDD and what/${timeName} HHmmss, from 1950 on`,
  );
}

/** Wavelength is stored in cm; ODIM_H5 2.4 also knows the frequency, in Hz. */
function wavelengthM(attributes: LevelAttributes, remarks: string[]): number | undefined {
  const wavelengthCm = within(attributes, "wavelength", 0.1, 200, "cm", remarks);
  if (wavelengthCm !== undefined) return wavelengthCm / 100;
  const frequencyHz = within(attributes, "frequency", 1.5e8, 3e11, "Hz", remarks);
  return frequencyHz === undefined ? undefined : SPEED_OF_LIGHT_M_PER_S / frequencyHz;
}

/** One width up to 2.2 (beamwidth), one for each polarisation plane since (beamwH, beamwV). */
function beamWidthDeg(attributes: LevelAttributes, remarks: string[]): SweepHeader["beamWidthDeg"] {
  const both = within(attributes, "beamwidth", 0.05, 20, "degrees", remarks);
  const horizontal = within(attributes, "beamwH", 0.05, 20, "degrees", remarks) ?? both;
  const vertical = within(attributes, "beamwV", 0.05, 20, "degrees", remarks) ?? both ?? horizontal;
  if (vertical === undefined) return undefined;
  return { horizontal: horizontal ?? vertical, vertical };
}

function within(
  attributes: LevelAttributes,
  name: string,
  lowest: number,
  highest: number,
  unit: string,
  remarks: string[],
): number | undefined {
  const value = attributes.number("how", name);
  if (value === undefined || (value >= lowest && value <= highest)) return value;
  remarks.push(`${name} is ${value} ${unit}, which cannot be; it is left out.`);
  return undefined;
}
