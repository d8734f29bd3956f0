import { cpus } from "node:os";
import { krigingAccuracy, type Seams, type Spread } from "./kriging-accuracy.ts";

/** What a bench hands back: a name and lines to print. */
export interface BenchReport {
  readonly name: string;
  readonly lines: string[];
}

/** Value and variance of 1,000 invented gauges on 10⁶ cells of 1 km, and how far that is from one whole system. */
export default function run(): BenchReport {
  const size = { gaugeCount: 1000, sideCells: 1000, neighbours: 16, checkedCells: 1000 };
  const { seconds, valueApart, standardErrorApart, seamsOfValue, seamsOfVariance } = krigingAccuracy(size);
  return {
    name: "local kriging: value and variance",
    lines: [
      `${size.gaugeCount} gauges, ${size.sideCells ** 2} cells, at least ${size.neighbours} neighbours, one thread: ${seconds.toFixed(1)} s (aim: at most 20 s); ${cpus()[0]?.model}, Node ${process.version}`,
      `apart from one system of all gauges, ${size.checkedCells} random cells (aim: at most 1 %): value ${apart(valueApart)}; standard error ${apart(standardErrorApart)}`,
      `seams of the value: ${seams(seamsOfValue)}`,
      `seams of the variance: ${seams(seamsOfVariance)}`,
    ],
  };
}

function apart({ median, largest }: Spread): string {
  return `median ${(100 * median).toFixed(3)} %, largest ${(100 * largest).toFixed(2)} %`;
}

function seams({
  largestStepAcross,
  largestStepInside,
  largestBendAcross,
  largestBendInside,
}: Seams): string {
  return `largest step to the next cell across a tile's border ${largestStepAcross.toFixed(3)}, inside ${largestStepInside.toFixed(3)}; largest bend across ${largestBendAcross.toFixed(3)}, inside ${largestBendInside.toFixed(3)}`;
}
