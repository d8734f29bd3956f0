import { InputError, type Moment, type SweepHeader } from "@rainreckon/core";
import type { Hdf5File } from "../../hdf5/index.ts";
import { type Scaling, toPhysical } from "../physical.ts";
import { takeRows } from "../take-rows.ts";
import { type Level, LevelAttributes } from "./levels.ts";

/** A moment of a sweep: where it is stored, and how to make numbers of it. */
export interface StoredMoment {
  readonly quantity: string;
  readonly level: Level;
}

/**
 * Whether a moment can be read, without decoding it.
 *
 * @throws InputError where its scaling or its shape does not fit
 */
export function checkMoment(
  file: Hdf5File,
  moment: StoredMoment,
  above: readonly Level[],
  header: SweepHeader,
): Scaling {
  const where = `${file.path}, ${moment.level.path.slice(1)}`;
  const attributes = new LevelAttributes(file, [moment.level, ...above]);
  checkGeometry(attributes, moment, header, where);

  const shape = file.describe(`${moment.level.path}/data`);
  if (shape === undefined) {
    throw new InputError(
      `${moment.quantity} has no array`,
      where,
      "leave the moment out, or fetch the file again",
    );
  }
  const [rays, gates] = shape.shape;
  if (shape.shape.length !== 2 || rays !== header.rayCount || gates !== header.gateCount) {
    throw new InputError(
      `the array of ${moment.quantity} is ${shape.shape.join(" by ")}, but the sweep has ${header.rayCount} rays of ${header.gateCount} gates`,
      where,
      "correct where/nrays and where/nbins, or fetch the file again",
    );
  }
  return scaling(attributes, moment, shape.type.startsWith("float"), where);
}

/** A moment may bring a geometry of its own; one that differs from the sweep's would be put in the wrong place. */
function checkGeometry(
  attributes: LevelAttributes,
  moment: StoredMoment,
  header: SweepHeader,
  where: string,
): void {
  if (!moment.level.children.has("where")) return;
  const gateLengthM = attributes.number("where", "rscale");
  if (gateLengthM !== undefined && gateLengthM !== header.gateLengthM) {
    throw new InputError(
      `the gates of ${moment.quantity} are ${gateLengthM} m long, those of the sweep ${header.gateLengthM} m`,
      where,
      "store the moment in a dataset of its own",
    );
  }
}

function scaling(
  attributes: LevelAttributes,
  { quantity }: StoredMoment,
  isFloat: boolean,
  where: string,
): Scaling {
  // Floating types are taken at their word; whole numbers mean nothing without a scale.
  const gain = attributes.number("what", "gain") ?? (isFloat ? 1 : undefined);
  const offset = attributes.number("what", "offset") ?? (isFloat ? 0 : undefined);
  if (gain === undefined || offset === undefined) {
    const missing = gain === undefined ? "gain" : "offset";
    throw new InputError(`${quantity} has no ${missing}`, where, `add what/${missing}`);
  }
  if (gain === 0 || !Number.isFinite(gain) || !Number.isFinite(offset)) {
    throw new InputError(
      `the gain of ${quantity} is ${gain} and its offset ${offset}`,
      where,
      "correct what/gain and what/offset: with these every gate has the same value or none",
    );
  }
  const nodata = attributes.number("what", "nodata");
  const undetect = attributes.number("what", "undetect");
  return {
    gain,
    offset,
    ...(nodata === undefined ? {} : { nodata }),
    ...(undetect === undefined ? {} : { undetect }),
  };
}

/**
 * Reads a moment.
 *
 * @param fileRow - row of the file for each ray; undefined where the rays stand as the file has them
 * @throws InputError where the moment does not fit the sweep or fails to decode
 */
export function readMoment(
  file: Hdf5File,
  moment: StoredMoment,
  above: readonly Level[],
  header: SweepHeader,
  fileRow: Int32Array | undefined,
): Moment {
  const scale = checkMoment(file, moment, above, header);
  const all = file.read(`${moment.level.path}/data`);
  const stored = fileRow === undefined ? all : takeRows(all, fileRow, header.gateCount);
  if (stored instanceof Float32Array || stored instanceof Float64Array) {
    return { quantity: moment.quantity, stored, ...toPhysical(stored, scale) };
  }
  return { quantity: moment.quantity, stored, ...scale };
}
