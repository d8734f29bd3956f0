import { InputError } from "@rainreckon/core";
import { type NetcdfFile, numberAttribute, textAttribute } from "../../netcdf/index.ts";

const MAX_GATES = 100_000;
const LONGEST_GATE_M = 20_000;
const FARTHEST_START_M = 200_000;
/** Ranges are float32 as a rule, so that steps of 250 m differ by centimetres at 300 km. */
const UNEVEN_SHARE = 0.1;
const SAME_SHARE = 0.001;

export interface Gates {
  readonly gateCount: number;
  readonly firstGateCentreM: number;
  readonly gateLengthM: number;
}

/**
 * The gates of a variable "range" that holds the centre of each.
 *
 * @throws InputError where they are not evenly spaced, or cannot be
 */
export function gatesOf(file: NetcdfFile, variable: string): Gates {
  const where = `${file.path}, ${variable}`;
  const shape = file.shapeOf(variable);
  const gateCount = shape?.[0] ?? 0;
  if (shape?.length !== 1 || !(gateCount >= 1 && gateCount <= MAX_GATES)) {
    throw new InputError(`the sweep claims ${gateCount} gates`, where, `it must have 1 to ${MAX_GATES}`);
  }
  const toMetres = /^(km|kilomet)/i.test(textAttribute(file, variable, "units") ?? "") ? 1000 : 1;
  const centres = file.numbers(variable);
  const first = (centres[0] as number) * toMetres;
  const last = (centres[gateCount - 1] as number) * toMetres;
  const said = numberAttribute(file, variable, "meters_between_gates");
  const step = gateCount > 1 ? (last - first) / (gateCount - 1) : (said ?? Number.NaN);
  if (!(step > 0 && step <= LONGEST_GATE_M)) {
    throw new InputError(
      `the gate length is ${step} m`,
      where,
      `it must be above 0 and at most ${LONGEST_GATE_M} m`,
    );
  }
  const uneven = centres.findIndex(
    (centre, gate) => !(Math.abs(centre * toMetres - first - gate * step) <= UNEVEN_SHARE * step),
  );
  if (uneven >= 0) {
    throw new InputError(
      `gates are not evenly spaced: gate ${uneven} lies at ${(centres[uneven] as number) * toMetres} m`,
      where,
      "store stretches of equal gates as sweeps of their own",
    );
  }
  if (!(first >= -step && first <= FARTHEST_START_M)) {
    throw new InputError(`the first gate lies at ${first} m`, where, "correct the range");
  }
  const saidFirst = numberAttribute(file, variable, "meters_to_center_of_first_gate");
  return {
    gateCount,
    firstGateCentreM: near(saidFirst, first, step) ? (saidFirst as number) : first,
    gateLengthM: near(said, step, step) ? (said as number) : step,
  };
}

/** Whether a rounded value of the file's header says the same as its array. */
function near(said: number | undefined, measured: number, gateLengthM: number): boolean {
  return said !== undefined && Math.abs(said - measured) <= SAME_SHARE * gateLengthM;
}
