import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { gzipSync } from "node:zlib";
import { TRUTH_RATE_STEP_MM_PER_HOUR } from "./grids.ts";
import { GATE_FLAGS, RAY_COUNT, type RadarPlan, type SweepTruth } from "./radar.ts";

/** Losses in gates_<node>.bin.gz are stored in steps of this many dB. */
const GATE_LOSS_STEP_DB = 0.01;

/** One sweep in a file of gates: where its planes begin once the file is unpacked. */
interface GateSweep {
  readonly start: string;
  readonly elevationDeg: number;
  readonly byteOffset: number;
}

interface GateFile {
  readonly gateCount: number;
  readonly gateM: number;
  readonly sweeps: GateSweep[];
  readonly planes: Uint8Array[];
  bytes: number;
}

/**
 * What is true at every gate of every sweep, for those who take a correction apart: two-way loss, rain at
 * the ground below, and why the echo is not simply rain.
 */
export class GateTruth {
  readonly #files = new Map<string, GateFile>();

  add(radar: RadarPlan, elevationDeg: number, startEpochMs: number, truth: SweepTruth): void {
    const { gateCount, gateM, node } = radar;
    const file = this.#files.get(node) ?? { gateCount, gateM, sweeps: [], planes: [], bytes: 0 };
    this.#files.set(node, file);
    file.sweeps.push({ start: new Date(startEpochMs).toISOString(), elevationDeg, byteOffset: file.bytes });
    for (const plane of [
      steps(truth.lossDb, GATE_LOSS_STEP_DB),
      steps(truth.rateMmPerHour, TRUTH_RATE_STEP_MM_PER_HOUR),
      truth.flags,
    ]) {
      file.planes.push(plane);
      file.bytes += plane.byteLength;
    }
  }

  write(folder: string): void {
    const radars = [...this.#files].map(([node, { gateCount, gateM, sweeps, planes }]) => {
      const name = `gates_${node}.bin.gz`;
      writeFileSync(join(folder, name), gzipSync(Buffer.concat(planes), { level: 1 }));
      return { node, file: name, rayCount: RAY_COUNT, gateCount, gateM, sweeps };
    });
    const told = {
      layout:
        "gzip; from each sweep's byteOffset on: loss (little-endian uint16), rain at the ground (little-endian uint16), flags (uint8), each of shape [ray, gate], ray 0 from 0 to 1 degree",
      lossStepDb: GATE_LOSS_STEP_DB,
      rateStepMmPerHour: TRUTH_RATE_STEP_MM_PER_HOUR,
      flags: GATE_FLAGS,
      radars,
    };
    writeFileSync(join(folder, "gates.json"), `${JSON.stringify(told, null, 1)}\n`);
  }
}

function steps(values: Float32Array, step: number): Uint8Array {
  return new Uint8Array(
    Uint16Array.from(values, (value) => Math.min(65535, Math.round(value / step))).buffer,
  );
}
