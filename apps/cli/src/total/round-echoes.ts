import {
  ECHO_MOMENTS,
  InputError,
  type MeasuredEcho,
  type Moment,
  measuredEcho,
  type PolarEcho,
  polarEcho,
  type Sweep,
} from "@rainreckon/core";
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

/** The sweeps of one round of one radar, each moment decoded when it is asked for, and once. */
export class RoundEchoes {
  readonly #radar: JobRadar;
  readonly #round: JobRound;
  readonly #onFault: (fault: SweepFault) => void;
  readonly #files = new Map<string, ScanFile>();
  readonly #shapes = new Map<JobSweep, Sweep>();
  readonly #measured = new Map<JobSweep, MeasuredEcho | undefined>();
  readonly #worked = new Map<JobSweep, PolarEcho | undefined>();
  readonly #wanted: readonly string[];

  /**
   * @param onFault - is told of what cannot be decoded, once each
   * @param wanted - moments that echo is worked on with, beside the reflectivity
   */
  constructor(
    radar: JobRadar,
    round: JobRound,
    onFault: (fault: SweepFault) => void,
    wanted: readonly string[] = ECHO_MOMENTS,
  ) {
    this.#radar = radar;
    this.#round = round;
    this.#onFault = onFault;
    this.#wanted = wanted;
  }

  /** The geometry of a sweep. @throws InputError as the readers do */
  shape(sweep: JobSweep): Sweep {
    let shape = this.#shapes.get(sweep);
    if (shape === undefined) {
      shape = this.#file(sweep).readSweep(sweep.index, []);
      this.#shapes.set(sweep, shape);
    }
    return shape;
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
    if (this.#worked.has(sweep)) return this.#worked.get(sweep);
    this.#worked.set(sweep, undefined);
    const measured = this.#measuredOf(sweep);
    if (measured === undefined) return undefined;
    const { moment, wavelengthM } = this.#radar;
    const { quantities } = this.shape(sweep);
    const wanted = this.#wanted.filter((name) => name !== moment && quantities.includes(name));
    const decoded = this.#decode(sweep, wanted);
    const known = wavelengthM === undefined ? decoded : { ...decoded, wavelengthM };
    const echo = polarEcho(known, moment, whereOf(sweep, known), measured);
    this.#worked.set(sweep, echo);
    return echo;
  }

  /** The sweep above another to compare it with, as it was measured; undefined where there is none, or it does not decode. */
  above(sweep: JobSweep): MeasuredEcho | undefined {
    const over = (stepDeg: number) =>
      this.#round.sweeps.find(({ elevationDeg }) => elevationDeg > sweep.elevationDeg + stepDeg);
    const higher = over(CLEAR_STEP_DEG) ?? over(SAME_ELEVATION_DEG);
    if (higher === undefined) return undefined;
    try {
      return this.#measuredOf(higher);
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

  /** Undefined where it was already found that it does not decode. */
  #measuredOf(sweep: JobSweep): MeasuredEcho | undefined {
    if (this.#measured.has(sweep)) return this.#measured.get(sweep);
    this.#measured.set(sweep, undefined);
    const decoded = this.plain(sweep);
    const { moment } = this.#radar;
    const where = whereOf(sweep, decoded);
    const measured = measuredEcho(decoded, moment, where);
    if (measured === undefined)
      throw new InputError(`no ${moment}`, where, "name another moment in the plan");
    this.#measured.set(sweep, measured);
    return measured;
  }

  #decode(sweep: JobSweep, wanted: readonly string[]): Sweep {
    const file = this.#file(sweep);
    try {
      return file.readSweep(sweep.index, wanted);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
    }
    // Something does not decode: one by one, so that a bad ZDR costs no rain.
    const moments = new Map<string, Moment>();
    for (const name of wanted) {
      try {
        for (const [key, value] of file.readSweep(sweep.index, [name]).moments) moments.set(key, value);
      } catch (error) {
        this.tell(sweep, error);
      }
    }
    return { ...this.shape(sweep), moments };
  }
}

function whereOf({ name }: JobSweep, { origin }: Sweep): string {
  return `${name}, ${origin.dataset}`;
}
