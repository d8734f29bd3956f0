import { mkdirSync } from "node:fs";
import path from "node:path";
import h5wasm, { type Group } from "h5wasm/node";

/** One sweep to write: reflectivity in stored numbers, dBZ = 0.5 stored − 32; 0 is undetect, 255 nodata. */
export interface SweepToWrite {
  readonly elevationDeg: number;
  readonly startEpochMs: number;
  /** Shape [RAYS, gateCount]. */
  readonly stored: Uint8Array;
  /** ODIM name of the moment [DBZH]. */
  readonly quantity?: string;
  readonly gain?: number;
  /** Attributes that this sweep lacks, by name. */
  readonly without?: readonly string[];
}

/** An invented radar. */
export interface RadarToWrite {
  readonly node: string;
  readonly lonDeg: number;
  readonly latDeg: number;
  readonly gateM: number;
  readonly gateCount: number;
}

/** One ray a degree, the first from north to 1°. */
export const RAYS = 360;
export const SWEEP_SECONDS = 20;

/** The stored number of a reflectivity, dBZ. */
export function storedDbz(dbz: number): number {
  return (dbz + 32) * 2;
}

/**
 * Writes an ODIM_H5 2.3 volume with nothing but the general HDF5 library, as the standard lays it out.
 *
 * @param sweeps - in the order of the file
 */
export async function writeVolume(
  file: string,
  radar: RadarToWrite,
  sweeps: readonly SweepToWrite[],
): Promise<string> {
  await h5wasm.ready;
  mkdirSync(path.dirname(file), { recursive: true });
  const hdf5 = new h5wasm.File(file, "w");
  try {
    const put = (
      group: Group,
      values: Readonly<Record<string, string | number>>,
      without: readonly string[] = [],
    ) => {
      for (const [name, value] of Object.entries(values)) {
        if (without.includes(name)) continue;
        if (typeof value === "string")
          group.create_attribute(name, value, null, `S${Math.max(1, Buffer.byteLength(value))}`);
        else group.create_attribute(name, value, null, "<d");
      }
    };
    const first = odimTime(sweeps[0]?.startEpochMs ?? 0);
    put(hdf5, { Conventions: "ODIM_H5/V2_3" });
    put(hdf5.create_group("what"), {
      object: "PVOL",
      version: "H5rad 2.3",
      date: first.date,
      time: first.time,
      source: `NOD:${radar.node},PLC:Invented`,
    });
    put(hdf5.create_group("where"), { lon: radar.lonDeg, lat: radar.latDeg, height: 50 });
    put(hdf5.create_group("how"), { wavelength: 5.35, beamwidth: 1 });
    for (const [k, sweep] of sweeps.entries()) {
      const start = odimTime(sweep.startEpochMs);
      const end = odimTime(sweep.startEpochMs + SWEEP_SECONDS * 1000);
      const dataset = hdf5.create_group(`dataset${k + 1}`);
      put(dataset.create_group("what"), {
        product: "SCAN",
        startdate: start.date,
        starttime: start.time,
        enddate: end.date,
        endtime: end.time,
      });
      const where = {
        elangle: sweep.elevationDeg,
        nrays: RAYS,
        nbins: radar.gateCount,
        rstart: 0,
        rscale: radar.gateM,
        a1gate: 0,
      };
      put(dataset.create_group("where"), where, sweep.without);
      const data = dataset.create_group("data1");
      put(data.create_group("what"), {
        quantity: sweep.quantity ?? "DBZH",
        gain: sweep.gain ?? 0.5,
        offset: -32,
        nodata: 255,
        undetect: 0,
      });
      const shape = [RAYS, radar.gateCount];
      data.create_dataset({ name: "data", data: sweep.stored, shape, chunks: shape, compression: 6 });
    }
  } finally {
    hdf5.close();
  }
  return file;
}

function odimTime(epochMs: number): { date: string; time: string } {
  const digits = new Date(epochMs).toISOString().replace(/\D/g, "");
  return { date: digits.slice(0, 8), time: digits.slice(8, 14) };
}
