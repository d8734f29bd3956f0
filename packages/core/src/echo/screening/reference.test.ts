import {
  type CheckValue,
  inputNumber,
  inputNumbers,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { DRY, sketchSweep } from "./sketch.ts";
import { STATIC_SHARE, StaticEchoLearner } from "./static-echo-learner.ts";
import {
  STILL_VELOCITY_M_PER_S,
  STILL_WIDTH_M_PER_S,
  SUSPECT_SPIN_PERCENT,
  SUSPECT_TEXTURE_DB2,
  spinChangePercent,
  textureDb2,
} from "./texture.ts";

/** Share of scans in which one gate of an otherwise dry sweep shows, as the learner has it. */
function learnedFrequencyPercent(entry: CheckValue): number {
  const learner = new StaticEchoLearner();
  const scans = inputNumber(entry, "scans");
  const exceedances = inputNumber(entry, "exceedances");
  for (let scan = 0; scan < scans; scan++) {
    const shows = scan < exceedances;
    learner.add(
      sketchSweep({
        rayCount: 36,
        gateCount: 20,
        dbz: (ray, gate) => (shows && ray === 10 && gate === 8 ? 12 : DRY),
      }),
    );
  }
  const [sweep] = learner.finish().sweeps;
  return sweep?.static.share.length === 1 ? 100 * (sweep.static.share[0] as number) : Number.NaN;
}

runReferenceSuite({
  topics: ["j-clutter"],
  adapters: [
    ["texture-*", (entry) => textureDb2(inputNumbers(entry, "gates_dBZ"))],
    [
      "spin-*",
      (entry) => spinChangePercent(inputNumbers(entry, "gates_dBZ"), inputNumber(entry, "threshold_dB")),
    ],
    ["clutter-freq", learnedFrequencyPercent],
    ["clutter-thr-vel", () => STILL_VELOCITY_M_PER_S],
    ["clutter-thr-width", () => STILL_WIDTH_M_PER_S],
    ["clutter-thr-freq", () => 100 * STATIC_SHARE],
    ["clutter-thr-spin", () => SUSPECT_SPIN_PERCENT],
    ["clutter-thr-texture", () => SUSPECT_TEXTURE_DB2],
  ],
});
