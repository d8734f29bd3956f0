import { InputError, type RadarSite } from "@rainreckon/core";
import { type NetcdfFile, textAttribute } from "../../netcdf/index.ts";

const LONGEST_NAME = 80;
/** A platform that moves farther than this, in degrees, is no fixed radar. */
const STANDING_STILL_DEG = 0.001;

/**
 * The site of a CfRadial file. The format has no code that tells radars apart everywhere, so identity is by position.
 *
 * @throws InputError where the position is missing, impossible, or moves
 */
export function cfradialSite(file: NetcdfFile): RadarSite {
  const lonDeg = place(file, "longitude", -180, 360);
  const site = {
    lonDeg: lonDeg > 180 ? lonDeg - 360 : lonDeg,
    latDeg: place(file, "latitude", -90, 90),
    antennaHeightM: place(file, "altitude", -500, 9000),
  };
  const name = ["site_name", "instrument_name"]
    .map((attribute) => printable(textAttribute(file, "", attribute) ?? ""))
    .find((text) => text !== "");
  return {
    id: `AT-${site.latDeg.toFixed(4)}-${site.lonDeg.toFixed(4)}`,
    ...(name === undefined ? {} : { name }),
    ...site,
  };
}

function place(file: NetcdfFile, variable: string, lowest: number, highest: number): number {
  const where = `${file.path}, ${variable}`;
  if (file.shapeOf(variable) === undefined) {
    throw new InputError(`the radar's ${variable} is missing`, where, `add the variable ${variable}`);
  }
  const values = file.numbers(variable);
  const value = values[0] ?? Number.NaN;
  if (!(value >= lowest && value <= highest)) {
    throw new InputError(
      `the radar's ${variable} is ${value}`,
      where,
      `it must lie between ${lowest} and ${highest}`,
    );
  }
  const slack = variable === "altitude" ? 10 : STANDING_STILL_DEG;
  if (values.some((other) => Math.abs(other - value) > slack)) {
    throw new InputError("the platform moves", where, "only radars that stand still are read");
  }
  return value;
}

/** Names come from strangers: no control, format or surrogate characters, and no endless ones. */
function printable(text: string): string {
  return text.replace(/\p{C}/gu, "").trim().slice(0, LONGEST_NAME);
}
