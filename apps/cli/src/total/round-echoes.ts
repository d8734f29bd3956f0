import { ECHO_MOMENTS, InputError, type PolarEcho, polarEcho, type Sweep } from "@rainreckon/core";
import type { ScanFile } from "@rainreckon/formats";
import { openScans } from "../scans/scan-files.ts";
import type { JobRadar, JobRound, JobSweep, SweepFault } from "./job.ts";
import { placesOf } from "./places-of.ts";

/**
 * The sweep above that echo is compared with: the next one so much higher that clutter at the ground is out of its beam,
 * half a degree for the usual beam, else the next one that is no repetition of the same elevation. House rule.
 */
const CLEAR_STEP_DEG = 0.45;
const SAME_ELEVATION_DEG = 0.2;

/** The sweeps of one round of one radar, decoded when they are asked for, each once. */
export class RoundEchoes {
  readonly #radar: JobRadar;
  readonly #round: JobRound;
  readonly #onFault: (fault: SweepFault) => void;
  readonly #files = new Map<string, ScanFile>();
  readonly #raw = new Map<JobSweep, PolarEcho | undefined>();

  /** @param onFault - is told of what cannot be decoded, once each */
  constructor(radar: JobRadar, round: JobRound, onFault: (fault: SweepFault) => void) {
    this.#radar = radar;
    this.#round = round;
    this.#onFault = onFault;
  }

  /** The geometry of a sweep. @throws InputError as the readers do */
  shape(sweep: JobSweep): Sweep {
    return this.#file(sweep).readSweep(sweep.index, []);
  }

  /** A sweep with nothing but the moment that rain is made from. @throws InputError as the readers do */
  plain(sweep: JobSweep): Sweep {
    return this.#file(sweep).readSweep(sweep.index, [this.#radar.moment]);
  }

  /**
   * A sweep taken into work, with what moments its file holds. A moment other than the reflectivity that does not
   * decode is told of and left out.
   *
   * @returns undefined where it was already found that it does not decode
   * @throws InputError where the reflectivity does not decode
   */
  echo(sweep: JobSweep): PolarEcho | undefined {
    if (this.#raw.has(sweep)) return this.#raw.get(sweep);
    this.#raw.set(sweep, undefined);
    const file = this.#file(sweep);
    const header = file.readSweep(sweep.index, []);
    const { moment } = this.#radar;
    const wanted = ECHO_MOMENTS.filter((name) => name !== moment && header.quantities.includes(name));
    const where = `${sweep.name}, ${header.origin.dataset}`;
    const { wavelengthM } = this.#radar;
    const decoded = this.#decode(file, sweep, wanted);
    const echo = polarEcho(wavelengthM === undefined ? decoded : { ...decoded, wavelengthM }, moment, where);
    if (echo === undefined) throw new InputError(`no ${moment}`, where, "name another moment in the plan");
    this.#raw.set(sweep, echo);
    return echo;
  }

  /** The sweep above another to compare it with, as it was measured; undefined where there is none, or it does not decode. */
  above(sweep: JobSweep): PolarEcho | undefined {
    const over = (stepDeg: number) =>
      this.#round.sweeps.find(({ elevationDeg }) => elevationDeg > sweep.elevationDeg + stepDeg);
    const higher = over(CLEAR_STEP_DEG) ?? over(SAME_ELEVATION_DEG);
    if (higher === undefined) return undefined;
    try {
      return this.echo(higher);
    } catch (error) {
      this.tell(higher, error);
      return undefined;
    }
  }

  /** Notes a fault of a sweep; anything but an InputError is thrown on. */
  tell(sweep: JobSweep, error: unknown): void {
    if (!(error instanceof InputError)) throw error;
    // Readers name the file as it was handed to them; people and other machines know it by its name.
    const where = error.where.replace(sweep.path, sweep.name);
    this.#onFault({ what: error.what, where, fix: error.fix, file: sweep.name });
  }

  close(): void {
    for (const file of this.#files.values()) file.close();
    this.#files.clear();
  }

  #file(sweep: JobSweep): ScanFile {
    let file = this.#files.get(sweep.path);
    if (file === undefined) {
      file = openScans(sweep, placesOf(this.#radar));
      this.#files.set(sweep.path, file);
    }
    return file;
  }

  #decode(file: ScanFile, sweep: JobSweep, wanted: readonly string[]): Sweep {
    const { moment } = this.#radar;
    try {
      return file.readSweep(sweep.index, [moment, ...wanted]);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
    }
    // Something does not decode: one by one, so that a bad ZDR costs no rain.
    const decoded = file.readSweep(sweep.index, [moment]);
    const moments = new Map(decoded.moments);
    for (const name of wanted) {
      try {
        for (const [key, value] of file.readSweep(sweep.index, [name]).moments) moments.set(key, value);
      } catch (error) {
        this.tell(sweep, error);
      }
    }
    return { ...decoded, moments };
  }
}
