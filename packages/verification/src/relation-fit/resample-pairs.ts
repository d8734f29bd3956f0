import { addCircularBlock, type BootstrapSettings, MIN_BOOTSTRAP_UNITS } from "../bootstrap.ts";
import { uniformStream } from "../random.ts";

/** What pairs have in common: those of one gauge, and those of one stretch of time, are no independent evidence. */
export interface PairUnits {
  /** Shape [n]: 0 to gaugeCount - 1. */
  readonly gaugeOf: Uint32Array;
  readonly gaugeCount: number;
  /** Shape [n]: 0 to timeCount - 1, in time order. */
  readonly timeOf: Uint32Array;
  readonly timeCount: number;
  /** Times that are drawn together, 1 to timeCount. */
  readonly blockLength: number;
}

/** What is drawn, or why nothing is. */
export type Drawing =
  | { readonly gauges: boolean; readonly times: boolean; readonly words: string }
  | { readonly reason: string };

/** Which units are many enough to be drawn from; with neither there is no interval of confidence. */
export function drawingOf({ gaugeOf, timeOf, blockLength }: PairUnits): Drawing {
  const gaugeCount = new Set(gaugeOf).size;
  const blockCount = new Set(timeOf.map((time) => Math.floor(time / blockLength))).size;
  const gauges = gaugeCount >= MIN_BOOTSTRAP_UNITS;
  const times = blockCount >= MIN_BOOTSTRAP_UNITS;
  if (!(gauges || times)) {
    return {
      reason: `fewer than ${MIN_BOOTSTRAP_UNITS} gauges and fewer than ${MIN_BOOTSTRAP_UNITS} blocks of time hold pairs`,
    };
  }
  const few = (noun: string) => `${noun} are too few to draw`;
  const words = [
    gauges ? `${gaugeCount} gauges` : few("gauges"),
    times ? `${blockCount} blocks of time` : few("blocks of time"),
  ];
  return { gauges, times, words: words.join(", ") };
}

/**
 * Weights of the pairs in random samples of the same size: gauges and circular blocks of time are drawn independently
 * of each other, and a pair occurs as often as its gauge times as often as its time.
 *
 * Sources: Owen (2007), The pigeonhole bootstrap, Annals of Applied Statistics 1, 386-411, for rows and columns drawn
 * independently; it is rather too wide than too narrow. Blocks: Politis and Romano (1992), as in `resampledScores`.
 *
 * @param drawing - which of the two are drawn; the other counts once each
 * @yields shape [n]; the same array each time
 */
export function* pairWeights(
  { gaugeOf, gaugeCount, timeOf, timeCount, blockLength }: PairUnits,
  drawing: { readonly gauges: boolean; readonly times: boolean },
  { seed, samples }: Pick<BootstrapSettings, "seed" | "samples">,
): Generator<Float64Array> {
  if (!(blockLength >= 1 && blockLength <= timeCount)) {
    throw new RangeError(`a block holds 1 to ${timeCount} times, got ${blockLength}`);
  }
  const uniform = uniformStream(seed);
  const ofGauge = new Float64Array(gaugeCount).fill(1);
  const ofTime = new Float64Array(timeCount).fill(1);
  const weights = new Float64Array(gaugeOf.length);
  const draw = (units: Float64Array, length: number) => {
    units.fill(0);
    for (let drawn = 0; drawn < units.length; drawn += length) {
      const start = Math.floor(uniform() * units.length);
      addCircularBlock(units, start, Math.min(length, units.length - drawn));
    }
  };
  for (let sample = 0; sample < samples; sample++) {
    if (drawing.gauges) draw(ofGauge, 1);
    if (drawing.times) draw(ofTime, blockLength);
    for (let i = 0; i < weights.length; i++) weights[i] = ofGauge[gaugeOf[i]] * ofTime[timeOf[i]];
    yield weights;
  }
}
