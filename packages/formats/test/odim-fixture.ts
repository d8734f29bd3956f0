import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import h5wasm, { type Group } from "h5wasm/node";

/** Attributes of one group: whole numbers go in as 64-bit integers, as common writers store them. */
export type Attributes = Readonly<Record<string, string | number | readonly number[]>>;

/** One level of an ODIM_H5 file, in plain terms. */
export interface LevelContent {
  readonly what?: Attributes;
  readonly where?: Attributes;
  readonly how?: Attributes;
}

export interface MomentContent extends LevelContent {
  readonly values?: Uint8Array | Uint16Array | Int16Array | Int32Array | Float32Array | Int8Array;
  readonly shape?: readonly number[];
}

export interface DatasetContent extends LevelContent {
  readonly data: readonly MomentContent[];
}

export interface OdimContent extends LevelContent {
  readonly conventions?: string;
  readonly datasets: readonly DatasetContent[];
}

export const RAYS = 8;
export const GATES = 5;

/** An invented radar; every part can be replaced. */
export const ROOT = {
  conventions: "ODIM_H5/V2_3",
  what: {
    object: "PVOL",
    version: "H5rad 2.3",
    date: "20310503",
    time: "120000",
    source: "NOD:zzone,PLC:Invented",
  },
  where: { lon: 3.25, lat: 52.5, height: 41.5 },
  how: { wavelength: 5.3, beamwidth: 1.1 },
} as const;

export const DATASET = {
  what: {
    product: "SCAN",
    startdate: "20310503",
    starttime: "120000",
    enddate: "20310503",
    endtime: "120016",
  },
  where: { elangle: 0.5, nrays: RAYS, nbins: GATES, rstart: 0, rscale: 500, a1gate: 2 },
} as const;

/** A moment of stored numbers 0, 1, 2, … in half decibels from -32. */
export const MOMENT = {
  what: { quantity: "DBZH", gain: 0.5, offset: -32, nodata: 255, undetect: 0 },
  values: Uint8Array.from({ length: RAYS * GATES }, (_, i) => i),
} as const;

/** A file of one sweep, with parts of its dataset and moment replaced. */
export function oneSweep(
  dataset: Partial<DatasetContent> = {},
  moment: Partial<MomentContent> = {},
): OdimContent {
  return { ...ROOT, datasets: [{ ...DATASET, data: [{ ...MOMENT, ...moment }], ...dataset }] };
}

/**
 * Writes an ODIM_H5 file with nothing but the general HDF5 library, laid out as the standard has it.
 *
 * @returns path of the new file, in a temporary folder of its own
 */
export function writeOdim(
  content: OdimContent,
  path: string = temporaryPath("scan.h5"),
  layout: readonly ["earliest" | "v110", "v110"] = ["earliest", "v110"],
): string {
  const file = new h5wasm.File(path, "w", { libver: [...layout] });
  if (content.conventions !== undefined) {
    file.create_attribute("Conventions", content.conventions, null, textType(content.conventions));
  }
  writeLevel(file, content);
  content.datasets.forEach((dataset, i) => {
    const group = file.create_group(`dataset${i + 1}`);
    writeLevel(group, dataset);
    dataset.data.forEach((moment, k) => {
      const data = group.create_group(`data${k + 1}`);
      writeLevel(data, moment);
      const { values, shape = [RAYS, GATES] } = moment;
      if (values === undefined) return;
      data.create_dataset({
        name: "data",
        data: values,
        shape: [...shape],
        chunks: [...shape],
        compression: 6,
      });
    });
  });
  file.close();
  return path;
}

const folders: string[] = [];

/** A path in a new temporary folder. */
export function temporaryPath(name: string): string {
  const folder = mkdtempSync(join(tmpdir(), "formats-"));
  folders.push(folder);
  return join(folder, name);
}

/** Removes every temporary folder made so far. */
export function removeTemporary(): void {
  for (const folder of folders.splice(0)) rmSync(folder, { recursive: true, force: true });
}

function writeLevel(group: Group, level: LevelContent): void {
  for (const name of ["what", "where", "how"] as const) {
    const attributes = level[name];
    if (attributes === undefined) continue;
    const target = group.create_group(name);
    for (const [key, value] of Object.entries(attributes)) writeAttribute(target, key, value);
  }
}

function writeAttribute(group: Group, name: string, value: Attributes[string]): void {
  if (typeof value === "string") group.create_attribute(name, value, null, textType(value));
  else if (typeof value !== "number") group.create_attribute(name, [...value], null, "<d");
  else if (Number.isInteger(value)) {
    group.create_attribute(name, BigInt(value) as unknown as number, null, "<q");
  } else group.create_attribute(name, value, null, "<d");
}

function textType(text: string): string {
  return `S${Math.max(Buffer.byteLength(text), 1)}`;
}
