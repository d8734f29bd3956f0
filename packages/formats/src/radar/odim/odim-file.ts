import {
  InputError,
  type Moment,
  type Notice,
  type RadarSite,
  type Sweep,
  type SweepHeader,
} from "@rainreckon/core";
import { type Hdf5File, openHdf5 } from "../../hdf5/index.ts";
import type { ScanFile } from "../scan-file.ts";
import { sweepHeader } from "./header.ts";
import { type Level, LevelAttributes } from "./levels.ts";
import { checkMoment, readMoment, type StoredMoment } from "./moment.ts";
import { type SortedRays, type StoredRays, sortRays } from "./rays.ts";
import { radarSite } from "./site.ts";

/** What the objects of ODIM_H5 are, for people who handed in one that is no polar scan. */
const OTHER_OBJECTS: Readonly<Record<string, string>> = {
  CVOL: "a Cartesian volume",
  IMAGE: "a Cartesian image",
  COMP: "a Cartesian composite of several radars",
  XSEC: "a vertical cross-section",
  VP: "a vertical profile",
  PIC: "an embedded picture",
  RAY: "a single ray",
  AZIM: "a fan of rays at one azimuth",
  ELEV: "a fan of rays at one azimuth",
};

const MAX_DATASETS = 1000;

/** A sweep as it lies in the file. */
interface StoredSweep {
  readonly header: SweepHeader;
  readonly moments: ReadonlyMap<string, StoredMoment>;
  readonly levels: readonly [dataset: Level, root: Level];
}

/**
 * Opens an ODIM_H5 file, versions 2.0 to 2.4, holding a polar volume (PVOL) or a scan (SCAN).
 *
 * @returns undefined where it is an HDF5 file that says nothing of an ODIM_H5 object
 * @throws InputError where the file is damaged, is no polar scan, or has no sweep that can be used
 * @see ODIM_H5 2.3, OPERA Data Information Model for HDF5, EUMETNET OPERA (2019)
 */
export function openOdim(path: string): ScanFile | undefined {
  const file = openHdf5(path);
  try {
    const root: Level = { path: "", children: new Set(file.children("/")) };
    const object = new LevelAttributes(file, [root]).text("what", "object");
    if (object !== undefined) return readStructure(file, root, object);
    file.close();
    return undefined;
  } catch (error) {
    file.close();
    throw error;
  }
}

function readStructure(file: Hdf5File, root: Level, object: string): ScanFile {
  const attributes = new LevelAttributes(file, [root]);
  checkObject(file, object);
  const remarks: Notice[] = [];
  checkVersion(file, attributes, remarks);
  const names = numbered(root, "dataset");
  if (names.length === 0) {
    throw new InputError("the file holds no dataset", file.path, "leave it out, or fetch it again");
  }
  if (names.length > MAX_DATASETS) {
    throw new InputError(
      `the file claims ${names.length} datasets`,
      file.path,
      `no volume has more than ${MAX_DATASETS} sweeps: check the file`,
    );
  }
  const site = siteOf(file, attributes);

  const sweeps: StoredSweep[] = [];
  const leftOut: InputError[] = [];
  for (const name of names) {
    try {
      sweeps.push(readSweepHeader(file, root, name, site));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      leftOut.push(error);
    }
  }
  if (sweeps.length === 0) throw leftOut[0];
  return new OdimFile(file, sweeps, remarks, leftOut);
}

function checkObject(file: Hdf5File, object: string): void {
  if (object === "PVOL" || object === "SCAN") return;
  const meaning = OTHER_OBJECTS[object] ?? "an object that is not known here";
  throw new InputError(
    `not a polar scan, this is ${meaning} (${object.slice(0, 20)})`,
    file.path,
    "hand in the polar volumes (PVOL) or scans (SCAN) that it was made from",
  );
}

function checkVersion(file: Hdf5File, attributes: LevelAttributes, remarks: Notice[]): void {
  const conventions = file.attribute("/", "Conventions");
  const named = typeof conventions === "string" ? conventions : attributes.text("what", "version");
  const version = /(?:ODIM_H5\/V|H5rad )(\d+)[_.](\d+)/.exec(named ?? "");
  if (version !== null && version[1] === "2" && Number(version[2]) <= 4) return;
  remarks.push({
    what: `the file names its version as "${(named ?? "").slice(0, 40)}"; it is read as ODIM_H5 2`,
    where: file.path,
    fix: "compare a sweep with what its maker shows",
  });
}

function siteOf(file: Hdf5File, attributes: LevelAttributes): RadarSite {
  const lonDeg = attributes.number("where", "lon");
  const latDeg = attributes.number("where", "lat");
  const antennaHeightM = attributes.number("where", "height");
  const limits = [
    ["lon", lonDeg, -180, 180],
    ["lat", latDeg, -90, 90],
    ["height", antennaHeightM, -500, 9000],
  ] as const;
  for (const [name, value, lowest, highest] of limits) {
    if (!(value !== undefined && value >= lowest && value <= highest)) {
      throw new InputError(
        value === undefined ? `the radar's ${name} is missing` : `the radar's ${name} is ${value}`,
        `${file.path}, where`,
        `where/${name} must lie between ${lowest} and ${highest}`,
      );
    }
  }
  return radarSite(attributes.text("what", "source") ?? "", {
    lonDeg: lonDeg as number,
    latDeg: latDeg as number,
    antennaHeightM: antennaHeightM as number,
  });
}

function readSweepHeader(file: Hdf5File, root: Level, name: string, site: RadarSite): StoredSweep {
  const dataset: Level = { path: `/${name}`, children: new Set(file.children(`/${name}`)) };
  const where = `${file.path}, ${name}`;
  const product = new LevelAttributes(file, [dataset]).text("what", "product");
  if (product === "RHI" || product === "AZIM" || product === "ELEV") {
    throw new InputError("a fan of rays at one azimuth, not a sweep", where, "leave it out");
  }
  const { moments, remarks } = momentsOf(file, dataset, root);
  const [first] = moments.values();
  if (first === undefined) throw new InputError("the dataset holds no moment", where, "leave it out");
  const header = sweepHeader(new LevelAttributes(file, [aboutSweep(first.level), dataset, root]), {
    site,
    origin: { path: file.path, dataset: name },
    quantities: [...moments.keys()].sort(),
    firstShape: () => file.describe(`${first.level.path}/data`),
  });
  return {
    header: remarks.length === 0 ? header : { ...header, remarks: [...header.remarks, ...remarks] },
    moments,
    levels: [dataset, root],
  };
}

/** A data group as far as it may speak of the whole sweep: its "what" is about the moment alone. */
function aboutSweep({ path, children }: Level): Level {
  return { path, children: new Set([...children].filter((name) => name !== "what")) };
}

function momentsOf(
  file: Hdf5File,
  dataset: Level,
  root: Level,
): { moments: ReadonlyMap<string, StoredMoment>; remarks: readonly string[] } {
  const moments = new Map<string, StoredMoment>();
  const remarks: string[] = [];
  for (const name of numbered(dataset, "data")) {
    const path = `${dataset.path}/${name}`;
    const level: Level = { path, children: new Set(file.children(path)) };
    const quantity = new LevelAttributes(file, [level, dataset, root]).text("what", "quantity");
    if (quantity === undefined || !/^\w{1,32}$/.test(quantity)) {
      remarks.push(`${name} does not say what it measures; it is left out.`);
    } else if (moments.has(quantity)) {
      remarks.push(`${name} holds ${quantity} once more; the first one counts.`);
    } else {
      moments.set(quantity, { quantity, level });
    }
  }
  return { moments, remarks };
}

/** Names like "dataset1", "dataset2", in the order of their numbers. */
function numbered(level: Level, stem: string): readonly string[] {
  const number = (name: string) => Number(name.slice(stem.length));
  return [...level.children]
    .filter((name) => name.startsWith(stem) && /^\d{1,6}$/.test(name.slice(stem.length)))
    .sort((a, b) => number(a) - number(b));
}

class OdimFile implements ScanFile {
  readonly format = "ODIM_H5";
  readonly headers: readonly SweepHeader[];
  readonly remarks: readonly Notice[];
  readonly leftOut: readonly InputError[];
  readonly #file: Hdf5File;
  readonly #sweeps: readonly StoredSweep[];
  readonly #rays = new Map<StoredSweep, SortedRays>();

  constructor(
    file: Hdf5File,
    sweeps: readonly StoredSweep[],
    remarks: readonly Notice[],
    leftOut: readonly InputError[],
  ) {
    this.#file = file;
    this.#sweeps = sweeps;
    this.headers = sweeps.map(({ header }) => header);
    this.remarks = remarks;
    this.leftOut = leftOut;
  }

  inspect(): readonly InputError[] {
    const faults: InputError[] = [];
    for (const { header, moments, levels } of this.#sweeps) {
      for (const moment of moments.values()) {
        try {
          checkMoment(this.#file, moment, levels, header);
        } catch (error) {
          if (!(error instanceof InputError)) throw error;
          faults.push(error);
        }
      }
    }
    return faults;
  }

  readSweep(index: number, quantities?: readonly string[]): Sweep {
    const sweep = this.#sweeps[index];
    if (sweep === undefined) {
      throw new RangeError(`there is no sweep ${index}; ${this.#file.path} has ${this.#sweeps.length}`);
    }
    const wanted = (quantities ?? sweep.header.quantities).map((quantity) => momentNamed(sweep, quantity));
    const rays = this.#raysOf(sweep);
    const moments = new Map<string, Moment>();
    for (const moment of wanted) {
      moments.set(moment.quantity, readMoment(this.#file, moment, sweep.levels, sweep.header, rays.fileRow));
    }
    const { azimuthDeg, rayElevationDeg, rayTimeEpochMs, rayTimesDerived, raysReordered } = rays;
    return {
      ...sweep.header,
      rayCount: azimuthDeg.length,
      remarks: [...sweep.header.remarks, ...rays.remarks],
      azimuthDeg,
      rayElevationDeg,
      rayTimeEpochMs,
      rayTimesDerived,
      raysReordered,
      moments,
    };
  }

  close(): void {
    this.#file.close();
  }

  /** Moments of a sweep may be asked for one after the other: its rays are put in order once. */
  #raysOf(sweep: StoredSweep): SortedRays {
    let rays = this.#rays.get(sweep);
    if (rays === undefined) {
      rays = raysOf(this.#file, sweep);
      this.#rays.set(sweep, rays);
    }
    return rays;
  }
}

function momentNamed({ header, moments }: StoredSweep, quantity: string): StoredMoment {
  const moment = moments.get(quantity);
  if (moment !== undefined) return moment;
  throw new InputError(
    `the sweep has no ${quantity}; it offers ${header.quantities.join(", ")}`,
    `${header.origin.path}, ${header.origin.dataset}`,
    "name one of these as the moment of this radar, or leave the file out",
  );
}

function raysOf(file: Hdf5File, { header, moments, levels }: StoredSweep): SortedRays {
  const [first] = moments.values();
  const attributes = new LevelAttributes(
    file,
    first === undefined ? levels : [aboutSweep(first.level), ...levels],
  );
  const firstRay = attributes.number("where", "a1gate") ?? 0;
  const isRay = Number.isInteger(firstRay) && firstRay >= 0 && firstRay < header.rayCount;
  const arrays: { -readonly [K in keyof StoredRays]?: StoredRays[K] } = {};
  for (const [key, name] of RAY_ARRAYS) {
    const values = attributes.numbers("how", name);
    if (values !== undefined) arrays[key] = values;
  }
  // Both speeds are negative where the antenna turns counter-clockwise.
  const speed = attributes.number("how", "antspeed") ?? attributes.number("how", "rpm") ?? 1;
  const originDeg = attributes.number("how", "astart") ?? 0;
  const sorted = sortRays({
    rayCount: header.rayCount,
    elevationDeg: header.elevationDeg,
    startEpochMs: header.startEpochMs,
    endEpochMs: header.endEpochMs,
    firstRay: isRay ? firstRay : 0,
    clockwise: !(speed < 0),
    originDeg: Math.abs(originDeg) <= 360 ? originDeg : 0,
    ...arrays,
  });
  if (isRay) return sorted;
  const remark = `The first ray measured is given as ${firstRay}, which is none; it is taken to be ray 0.`;
  return { ...sorted, remarks: [...sorted.remarks, remark] };
}

const RAY_ARRAYS = [
  ["startAzimuthDeg", "startazA"],
  ["stopAzimuthDeg", "stopazA"],
  ["rayElevationDeg", "elangles"],
  ["startTimeS", "startazT"],
  ["stopTimeS", "stopazT"],
] as const;
