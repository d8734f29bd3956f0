import { type Group, File as Hdf5File, ready } from "h5wasm/node";
import { codingOf, RAY_COUNT, type RadarPlan, type SweepMoments } from "./radar.ts";

/** One sweep on its way into a file. */
export interface WrittenSweep {
  readonly elevationDeg: number;
  readonly startEpochMs: number;
  readonly endEpochMs: number;
  readonly moments: SweepMoments;
}

const QUANTITIES = ["DBZH", "TH", "VRADH", "ZDR", "RHOHV", "PHIDP"] as const;

/** Above the ground's echo TH says what DBZH says, and is left out: not every sweep has every moment. */
const TH_HIGHEST_DEG = 2;

/** The instant that stands in object headers: the library writes the clock there, and bytes must not depend on it. */
const PINNED_EPOCH_MS = Date.UTC(2031, 0, 1);

/**
 * Opens a new HDF5 file, lets `fill` write into it, and closes it; the same content gives the same bytes.
 *
 * @param layout - compact groups with checksums, or the oldest layout, larger, that may be patched in place
 * @throws Error if the file cannot be created
 */
export async function writeHdf5(
  path: string,
  fill: (root: Group) => void,
  layout: "compact" | "without checksums" = "compact",
): Promise<void> {
  await ready;
  const clock = Date.now;
  Date.now = () => PINNED_EPOCH_MS;
  try {
    const file = new Hdf5File(path, "w", {
      libver: [layout === "compact" ? "v108" : "earliest", "v110"],
    });
    if (file.file_id < 0n) throw new Error(`cannot create ${path}`);
    try {
      fill(file);
    } finally {
      file.close();
    }
  } finally {
    Date.now = clock;
  }
}

/** Fixed-length text, as ODIM asks. */
export function putText(group: Group, name: string, text: string): void {
  group.create_attribute(name, text, [], `S${Buffer.byteLength(text) + 1}`);
}

/** A real number, or a row of them. */
export function putReal(group: Group, name: string, value: number | Float64Array): void {
  group.create_attribute(name, value, typeof value === "number" ? [] : [value.length], "<d");
}

/** A whole number. */
export function putWhole(group: Group, name: string, value: number): void {
  group.create_attribute(name, BigInt(value) as unknown as number, [], "<q");
}

/** ODIM's way to write an instant: YYYYMMDD and HHmmss, UTC. */
export function odimDateTime(epochMs: number): { date: string; time: string } {
  const iso = new Date(epochMs).toISOString();
  return { date: iso.slice(0, 10).replaceAll("-", ""), time: iso.slice(11, 19).replaceAll(":", "") };
}

/**
 * Writes sweeps of one radar as ODIM_H5 2.3: object PVOL for a whole round, SCAN for a single sweep.
 *
 * @param nominalEpochMs - the round's nominal time
 */
export function writeSweeps(
  path: string,
  radar: RadarPlan,
  place: { readonly lonDeg: number; readonly latDeg: number },
  nominalEpochMs: number,
  sweeps: readonly WrittenSweep[],
): Promise<void> {
  return writeHdf5(path, (root) => {
    putText(root, "Conventions", "ODIM_H5/V2_3");
    const what = root.create_group("what");
    putText(what, "object", radar.files === "volumes" ? "PVOL" : "SCAN");
    putText(what, "version", "H5rad 2.3");
    const nominal = odimDateTime(nominalEpochMs);
    putText(what, "date", nominal.date);
    putText(what, "time", nominal.time);
    putText(what, "source", `NOD:${radar.node},PLC:${radar.name}`);
    const where = root.create_group("where");
    putReal(where, "lon", place.lonDeg);
    putReal(where, "lat", place.latDeg);
    putReal(where, "height", radar.antennaHeightM);
    const how = root.create_group("how");
    putText(how, "simulated", "True");
    putText(
      how,
      "comment",
      "Invented data of an invented district, Saltermoor: no such radar and no such storm",
    );
    putReal(how, "wavelength", Math.round(radar.wavelengthM * 1e5) / 1e3);
    putReal(how, "beamwidth", radar.beamWidthDeg);
    sweeps.forEach((sweep, i) => {
      writeSweep(root.create_group(`dataset${i + 1}`), radar, sweep);
    });
  });
}

function writeSweep(dataset: Group, radar: RadarPlan, sweep: WrittenSweep): void {
  const what = dataset.create_group("what");
  putText(what, "product", "SCAN");
  const start = odimDateTime(sweep.startEpochMs);
  const end = odimDateTime(sweep.endEpochMs);
  putText(what, "startdate", start.date);
  putText(what, "starttime", start.time);
  putText(what, "enddate", end.date);
  putText(what, "endtime", end.time);
  const where = dataset.create_group("where");
  putReal(where, "elangle", sweep.elevationDeg);
  putReal(where, "rstart", 0);
  putReal(where, "rscale", radar.gateM);
  putWhole(where, "nrays", RAY_COUNT);
  putWhole(where, "nbins", radar.gateCount);
  putWhole(where, "a1gate", radar.firstRay);
  const how = dataset.create_group("how");
  putReal(how, "NI", radar.nyquistMPerS);
  if (radar.rayTimes) putRayTimes(how, radar, sweep);
  const written = QUANTITIES.filter((quantity) => quantity !== "TH" || sweep.elevationDeg <= TH_HIGHEST_DEG);
  written.forEach((quantity, i) => {
    const group = dataset.create_group(`data${i + 1}`);
    const coding = codingOf(quantity, radar);
    const codes = group.create_group("what");
    putText(codes, "quantity", quantity);
    putReal(codes, "gain", coding.gain);
    putReal(codes, "offset", coding.offset);
    putReal(codes, "nodata", coding.nodata);
    putReal(codes, "undetect", coding.undetect);
    putArray(group, sweep.moments[quantity], radar.gateCount);
  });
}

/** An array of rays by gates in one compressed chunk. */
export function putArray(group: Group, values: Uint8Array | Uint16Array, gateCount: number): void {
  const shape = [values.length / gateCount, gateCount];
  const data = group.create_dataset({
    name: "data",
    data: values,
    shape,
    dtype: values instanceof Uint8Array ? "<B" : "<H",
    chunks: shape,
    compression: "gzip",
    compression_opts: 4,
  });
  putText(data as unknown as Group, "CLASS", "IMAGE");
  putText(data as unknown as Group, "IMAGE_VERSION", "1.2");
}

/** Azimuths and times at both ends of every ray, stored from north though measured from `firstRay`. */
function putRayTimes(how: Group, radar: RadarPlan, sweep: WrittenSweep): void {
  const rays = Array.from({ length: RAY_COUNT }, (_, ray) => ray);
  const seconds = (sweep.endEpochMs - sweep.startEpochMs) / 1000 / RAY_COUNT;
  const startT = rays.map(
    (ray) => sweep.startEpochMs / 1000 + ((ray - radar.firstRay + RAY_COUNT) % RAY_COUNT) * seconds,
  );
  putReal(how, "startazA", Float64Array.from(rays));
  putReal(
    how,
    "stopazA",
    Float64Array.from(rays, (ray) => (ray + 1) % RAY_COUNT),
  );
  putReal(how, "startazT", Float64Array.from(startT));
  putReal(
    how,
    "stopazT",
    Float64Array.from(startT, (t) => t + seconds),
  );
}
