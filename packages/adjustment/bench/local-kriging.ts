import { cpus } from "node:os";
import { krigingSystem } from "../src/kriging.ts";
import { localKriging } from "../src/local-kriging.ts";
import type { VariogramModel } from "../src/variogram-model.ts";

const GAUGES = 1000;
const SIDE_CELLS = 1000;
const NEIGHBOURS = [16, 24, 32];
const CHECKED = 1000;

/** What a bench hands back: a name and lines to print. */
export interface BenchReport {
  readonly name: string;
  readonly lines: string[];
}

/** Numbers from 0 to 1 from a 32-bit xorshift generator (Marsaglia 2003, J. Stat. Softw. 8(14)), seeded. */
function seeded(seed: number): () => number {
  let state = seed;
  return () => {
    state ^= state << 13;
    state ^= state >>> 17;
    state ^= state << 5;
    return (state >>> 0) / 2 ** 32;
  };
}

/** Value and variance of 1,000 invented gauges on 10⁶ cells of 1 km, and how far that is from one whole system. */
export default async function run(): Promise<BenchReport> {
  const next = seeded(20_310_520);
  const places = {
    xKm: Float64Array.from({ length: GAUGES }, () => SIDE_CELLS * next()),
    yKm: Float64Array.from({ length: GAUGES }, () => SIDE_CELLS * next()),
  };
  const values = places.xKm.map((x, i) => 30 + 12 * Math.sin(x / 60) * Math.cos(places.yKm[i] / 80));
  const model: VariogramModel = { shape: "exponential", nugget: 0, partialSill: 80, rangeKm: 60 };
  const input = { places, values, model, errorVariance: new Float64Array(GAUGES).fill(1) };
  const whole = krigingSystem(input);
  if (typeof whole === "string") throw new Error(whole);
  const lines = [
    `${GAUGES} gauges, ${SIDE_CELLS * SIDE_CELLS} cells, one thread; ${cpus()[0]?.model}, Node ${process.version}`,
  ];
  for (const neighbours of NEIGHBOURS) {
    const start = process.hrtime.bigint();
    const local = localKriging(input, neighbours);
    if (local === "singular") throw new Error(local);
    let sink = 0;
    for (let row = 0; row < SIDE_CELLS; row++) {
      for (let column = 0; column < SIDE_CELLS; column++) {
        const { value, variance } = local.estimate(column + 0.5, row + 0.5);
        sink += value + variance;
      }
    }
    const seconds = Number(process.hrtime.bigint() - start) / 1e9;
    const inner = seeded(7);
    const apart = Array.from({ length: CHECKED }, () => {
      const [x, y] = [50 + 900 * inner(), 50 + 900 * inner()];
      return Math.abs(local.estimate(x, y).value / whole.estimate(x, y).value - 1);
    }).sort((a, b) => a - b);
    const percent = (share: number) => `${(100 * share).toFixed(2)} %`;
    lines.push(
      `${neighbours} neighbours: ${seconds.toFixed(1)} s (aim: at most 20 s); apart from the whole system at ${CHECKED} cells: median ${percent(apart[CHECKED / 2])}, largest ${percent(apart[CHECKED - 1])}; sum ${sink.toFixed(0)}`,
    );
  }
  return { name: "local kriging: value and variance", lines };
}
