import { InputError, LowestEcho, type Notice, scansDisprove } from "@rainreckon/core";
import { formatsReady } from "@rainreckon/formats";
import { openScans } from "../scans/scan-files.ts";
import type { RadarInput } from "./inputs.ts";
import type { JobSensitivity } from "./job.ts";
import { placesOf } from "./places-of.ts";

/** So many rounds of a radar are read for their weakest echo; more would tell little else. */
const ROUNDS_MEASURED = 24;

/**
 * How weak an echo a radar sees, learned once before the units of work, which are given it: the file's
 * noise-equivalent reflectivity unless the scans themselves disprove it, else the weakest echo of the lowest
 * sweeps of rounds spread evenly over the run.
 *
 * It depends on which scans there are and not on their order, their files or the number of workers.
 *
 * @returns undefined where nothing tells
 */
export async function learnSensitivity(
  input: RadarInput,
  onNotice: (notice: Notice) => void,
): Promise<JobSensitivity | undefined> {
  await formatsReady();
  const measured = measure(input);
  const inFile = input.sweeps.find(({ header }) => header.noiseEquivalentDbz !== undefined)?.header
    .noiseEquivalentDbz;
  const where = `radar ${input.radar.id}`;
  if (inFile !== undefined) {
    if (measured === undefined || !scansDisprove(inFile, measured))
      return { at1KmDbz: inFile, floorDbz: Number.NEGATIVE_INFINITY, basis: "file" };
    onNotice({
      what:
        `the files say a noise-equivalent reflectivity of ${inFile} dBZ at 1 km, yet hold echo of ` +
        `${measured.at1KmDbz.toFixed(1)} dBZ (brought to 1 km)`,
      where,
      fix: "nothing to do: the sensitivity measured from the scans is used",
    });
  }
  if (measured === undefined) return undefined;
  return { at1KmDbz: measured.at1KmDbz, floorDbz: measured.floorDbz, basis: "scans" };
}

function measure({ radar, rounds, sweepOf }: RadarInput) {
  const echo = new LowestEcho();
  const every = Math.max(1, Math.ceil(rounds.length / ROUNDS_MEASURED));
  for (let k = 0; k < rounds.length; k += every) {
    const lowest = rounds[k].sweeps.reduce((low, sweep) =>
      sweep.elevationDeg < low.elevationDeg ? sweep : low,
    );
    const indexed = sweepOf.get(lowest);
    if (indexed === undefined) throw new RangeError("a round holds a sweep that was not indexed");
    try {
      const scan = openScans(indexed, placesOf(lowest));
      try {
        const moment = scan.readSweep(indexed.index, [radar.moment]).moments.get(radar.moment);
        if (moment !== undefined) echo.add(lowest, moment, `${indexed.file.name}, ${lowest.origin.dataset}`);
      } finally {
        scan.close();
      }
    } catch (error) {
      // A sweep that fails to decode is named by the unit of work that needs it.
      if (!(error instanceof InputError)) throw error;
    }
  }
  return echo.measure();
}
