import { cpus } from "node:os";
import { findRelation, lookUp, rateTable, resolveCap } from "../src/index.ts";

const GATES = 4_000_000;
const ROUNDS = 30;
const WARM_UP = 5;

/** What a bench hands back: a name and lines to print. */
export interface BenchReport {
  readonly name: string;
  readonly lines: string[];
}

/** Numbers from a 32-bit xorshift generator (Marsaglia 2003, J. Stat. Softw. 8(14)), seeded. */
function seededCodes(count: number, seed: number): Uint8Array {
  let state = seed;
  return Uint8Array.from({ length: count }, () => {
    state ^= state << 13;
    state ^= state >>> 17;
    state ^= state << 5;
    return state & 0xff;
  });
}

/** The yardstick: a plain loop that copies numbers of the same count. */
function copy(from: Float32Array, to: Float32Array): void {
  for (let i = 0; i < from.length; i++) to[i] = from[i] as number;
}

function millisecondsOf(work: () => void): number {
  const start = process.hrtime.bigint();
  work();
  return Number(process.hrtime.bigint() - start) / 1e6;
}

function describeTimes(label: string, times: readonly number[]): string {
  const mean = times.reduce((sum, time) => sum + time, 0) / times.length;
  const variance = times.reduce((sum, time) => sum + (time - mean) ** 2, 0) / (times.length - 1);
  const fastest = Math.min(...times);
  const rate = (GATES / fastest / 1000).toFixed(0);
  return (
    `${label}: minimum ${fastest.toFixed(2)} ms (${rate} million gates/s), ` +
    `mean ${mean.toFixed(2)} ± ${Math.sqrt(variance).toFixed(2)} ms`
  );
}

/** Conversion of stored uint8 reflectivity to rain rates, against copying as many 32-bit numbers. */
export default async function run(): Promise<BenchReport> {
  const relation = findRelation("marshall-1955-200/1.6");
  const settings = { relation, cap: resolveCap({ dbz: 53 }, relation), minRateMmPerHour: 0.1, offsetDb: 0 };
  const coding = { quantity: "DBZH", gain: 0.5, offset: -32, nodata: 255, undetect: 0 };
  const codes = seededCodes(GATES, 20_310_503);
  const numbers = Float32Array.from(codes);
  const table = rateTable(coding, codes, settings, "bench").rate;
  const rates = new Float32Array(GATES);
  const copied = new Float32Array(GATES);

  const tableTimes: number[] = [];
  const copyTimes: number[] = [];
  let sink = 0;
  for (let round = -WARM_UP; round < ROUNDS; round++) {
    // In turns, so that a slow moment of the machine falls on both.
    const tableTime = millisecondsOf(() => lookUp(codes, table, rates));
    const copyTime = millisecondsOf(() => copy(numbers, copied));
    sink += (rates[round + WARM_UP] || 0) + (copied[round + WARM_UP] as number);
    if (round < 0) continue;
    tableTimes.push(tableTime);
    copyTimes.push(copyTime);
  }

  const ratio = Math.min(...copyTimes) / Math.min(...tableTimes);
  return {
    name: "rate table: uint8 to rain rate against a plain loop copying a Float32Array of equal length",
    lines: [
      `${GATES} gates, ${ROUNDS} rounds after ${WARM_UP} of warm-up; ${cpus()[0]?.model}, Node ${process.version}`,
      describeTimes("table conversion", tableTimes),
      describeTimes("plain copy", copyTimes),
      `speed of the conversion: ${(100 * ratio).toFixed(0)} % of the copy (aim: at least 70 %)`,
      `sum that keeps the work alive: ${sink.toFixed(3)}`,
    ],
  };
}
