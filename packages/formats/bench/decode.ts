import { readdirSync } from "node:fs";
import { join } from "node:path";
import { openHdf5 } from "../src/hdf5/index.ts";
import { formatsReady, openScan } from "../src/radar/index.ts";

const PASSES = 3;

/** How a file was gone through: the arrays are summed into `sink`, so that nothing can be skipped. */
type Reading = (path: string) => { readonly sweeps: number; readonly sink: number };

/**
 * Time to decode a folder of volumes: the arrays alone, the headers alone, and sweeps as the reader gives them.
 *
 * @param folder - holds nothing but scans; RAINRECKON_BENCH_DIR where left out
 */
export default async function run(
  folder: string | undefined = process.env.RAINRECKON_BENCH_DIR,
): Promise<{ name: string; lines: string[] }> {
  if (folder === undefined) throw new RangeError("name a folder of volumes, or set RAINRECKON_BENCH_DIR");
  await formatsReady();
  const paths = readdirSync(folder)
    .filter((name) => /\.(h5|hdf)$/.test(name))
    .sort()
    .map((name) => join(folder, name));
  const name = `decode ${paths.length} volumes`;
  if (paths.length === 0) return { name, lines: [`no volume in ${folder}`] };

  const readings: readonly (readonly [string, Reading])[] = [
    ["arrays alone", readArrays],
    ["headers alone", readHeaders],
    ["sweeps", readSweeps],
  ];
  const lines = readings.map(([what, reading]) => {
    const { bestMs, meanMs, sweeps, sink } = timed(paths, reading);
    const perVolume = (bestMs / paths.length).toFixed(2);
    return `${what}: best ${bestMs.toFixed(0)} ms, mean ${meanMs.toFixed(0)} ms, ${perVolume} ms a volume (${sweeps} sweeps, sum ${sink})`;
  });
  return { name, lines };
}

function timed(paths: readonly string[], reading: Reading) {
  // One volume first: the library and the compiler warm up on it.
  reading(paths[0]);
  const times: number[] = [];
  let sweeps = 0;
  let sink = 0;
  for (let pass = 0; pass < PASSES; pass++) {
    const start = performance.now();
    sweeps = 0;
    sink = 0;
    for (const path of paths) {
      const read = reading(path);
      sweeps += read.sweeps;
      sink += read.sink;
    }
    times.push(performance.now() - start);
  }
  const meanMs = times.reduce((sum, time) => sum + time, 0) / PASSES;
  return { bestMs: Math.min(...times), meanMs, sweeps, sink };
}

/** The floor: what the HDF5 library takes for the arrays, without asking for a single attribute. */
function readArrays(path: string) {
  const file = openHdf5(path);
  let sweeps = 0;
  let sink = 0;
  while (file.describe(`/dataset${sweeps + 1}/data1/data`) !== undefined) {
    sweeps += 1;
    sink += file.read(`/dataset${sweeps}/data1/data`).length;
  }
  file.close();
  return { sweeps, sink };
}

function readHeaders(path: string) {
  const file = openScan(path);
  const sink = file.headers.reduce((sum, { rayCount, gateCount }) => sum + rayCount * gateCount, 0);
  file.close();
  return { sweeps: file.headers.length, sink };
}

function readSweeps(path: string) {
  const file = openScan(path);
  let sink = 0;
  file.headers.forEach((header, index) => {
    const quantity = header.quantities.includes("DBZH") ? "DBZH" : header.quantities[0];
    for (const { stored } of file.readSweep(index, [quantity]).moments.values()) sink += stored.length;
  });
  file.close();
  return { sweeps: file.headers.length, sink };
}
