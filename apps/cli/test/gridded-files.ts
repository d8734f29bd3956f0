import { mkdirSync } from "node:fs";
import path from "node:path";
import h5wasm, { type Group } from "h5wasm/node";

/** One gridded layer to write as an ODIM_H5 composite. Stored numbers are bytes; 255 is nodata, 0 undetect. */
export interface CompositeToWrite {
  readonly quantity: "RATE" | "ACRR" | "DBZH";
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  readonly nx: number;
  readonly ny: number;
  /** Shape [ny, nx], row 0 in the north. */
  readonly stored: Uint8Array;
  readonly gain: number;
  readonly offset?: number;
  readonly projdef: string;
  readonly cellM: number;
  /** Outer corner of the north-western cell. */
  readonly cornerLonDeg: number;
  readonly cornerLatDeg: number;
}

/** Writes an ODIM_H5 2.3 composite with nothing but the general HDF5 library, as the standard lays it out. */
export async function writeComposite(file: string, layer: CompositeToWrite): Promise<string> {
  await h5wasm.ready;
  mkdirSync(path.dirname(file), { recursive: true });
  const hdf5 = new h5wasm.File(file, "w");
  try {
    const put = (group: Group, values: Readonly<Record<string, string | number>>) => {
      for (const [name, value] of Object.entries(values)) {
        if (typeof value === "string")
          group.create_attribute(name, value, null, `S${Buffer.byteLength(value)}`);
        else group.create_attribute(name, value, null, "<d");
      }
    };
    const [start, end] = [digits(layer.startEpochMs), digits(layer.endEpochMs)];
    put(hdf5, { Conventions: "ODIM_H5/V2_3" });
    put(hdf5.create_group("what"), {
      object: "COMP",
      version: "H5rad 2.3",
      date: end.date,
      time: end.time,
      source: "ORG:0,CMT:invented",
    });
    put(hdf5.create_group("where"), {
      projdef: layer.projdef,
      xsize: layer.nx,
      ysize: layer.ny,
      xscale: layer.cellM,
      yscale: layer.cellM,
      UL_lon: layer.cornerLonDeg,
      UL_lat: layer.cornerLatDeg,
    });
    const dataset = hdf5.create_group("dataset1");
    put(dataset.create_group("what"), {
      product: "COMP",
      startdate: start.date,
      starttime: start.time,
      enddate: end.date,
      endtime: end.time,
    });
    const data = dataset.create_group("data1");
    put(data.create_group("what"), {
      quantity: layer.quantity,
      gain: layer.gain,
      offset: layer.offset ?? 0,
      nodata: 255,
      undetect: 0,
    });
    const shape = [layer.ny, layer.nx];
    data.create_dataset({ name: "data", data: layer.stored, shape, chunks: shape, compression: 6 });
  } finally {
    hdf5.close();
  }
  return file;
}

function digits(epochMs: number): { date: string; time: string } {
  const text = new Date(epochMs).toISOString().replace(/\D/g, "");
  return { date: text.slice(0, 8), time: text.slice(8, 14) };
}
