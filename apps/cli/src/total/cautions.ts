import { relationCaution } from "@rainreckon/core";
import { isMap, isScalar, isSeq } from "yaml";
import { parsePlanDocument } from "../plan/load.ts";
import { DEFAULT_RELATION } from "../plan/schema.ts";
import type { Comparison } from "./against-gauges.ts";
import type { AssembledRun } from "./assemble.ts";
import { calibrationProposals, proposalWords } from "./calibration.ts";
import type { ArealFigure } from "./figures.ts";
import { isAtCap } from "./figures.ts";
import type { PreparedRun } from "./prepare.ts";

/** Something that could change a figure, in words that stand alone. */
export interface RunCaution {
  readonly kind: "relation-not-chosen" | "other";
  readonly text: string;
  readonly detail?: string;
}

/** A beam higher than this above the sea tells little of what reaches the ground; common practice. */
const HIGH_BEAM_M = 2000;
/** Fewer trusted gauges than this make any adjustment a matter of luck. House rule. */
const FEW_GAUGES = 10;
/** Unseen rain is said where it could change the figure: so many mm, and so large a share of it. House rules. */
const MUCH_UNSEEN_MM = 0.2;
const MUCH_UNSEEN_SHARE = 0.05;
/** Share of the window that may be bridged or lie at its edges before it is said. */
const MUCH_BRIDGED = 0.05;

/** The cautions that travel with every figure, whatever a run found. */
export const STANDING_CAUTIONS: readonly string[] = [
  "Radar rain is an estimate from echo aloft, not a measurement at the ground.",
  "Totals do not replace official warnings, local codes or the judgement of a licensed practitioner.",
  "Not for dam-safety or warning decisions alone.",
];

/**
 * True where a plan still has the relation that was written into it: the value is the default and marked so, or is
 * not there at all. A relation that was looked at and kept must be marked by hand to count as chosen.
 */
export function relationWasNotChosen(planText: string): boolean {
  const { document } = parsePlanDocument(planText, "plan");
  const sources = ["radars", "grids"].flatMap((key) => {
    const list = document.get(key);
    return isSeq(list) ? list.items : [];
  });
  return sources.some((item) => {
    if (!isMap(item) || item.get("use") === false) return false;
    // Rain that came as rain needs no relation.
    if (item.get("quantity") === "rate" || item.get("quantity") === "depth") return false;
    const relation = item.get("relation", true);
    if (relation === undefined) return true;
    // Who writes another value seldom mends the remark behind it.
    return (
      isScalar(relation) &&
      relation.value === DEFAULT_RELATION &&
      /^\s*default\b/.test(relation.comment ?? "")
    );
  });
}

/** What could change the headline of a run, most important first. */
export function runCautions(
  run: PreparedRun,
  total: AssembledRun,
  comparison: Comparison,
  district: ArealFigure,
): RunCaution[] {
  const { plan, text } = run.loaded;
  const cautions: RunCaution[] = [];
  const say = (caution: string, detail?: string) =>
    cautions.push({ kind: "other", text: caution, ...(detail === undefined ? {} : { detail }) });
  if (relationWasNotChosen(text)) {
    cautions.push({
      kind: "relation-not-chosen",
      text: "Nobody chose the relation between echo and rain: it is the one the plan was written with.",
      detail:
        'The headline under other relations stands below. Set radars, relation in the plan; to keep this one, delete its remark "default".',
    });
  }
  for (const radar of run.shape.radars) {
    for (const { relation } of radar.relations) {
      const caution = relationCaution(relation);
      if (caution !== undefined) say(`Radar ${radar.site.id}: ${caution}.`);
    }
  }
  for (const { id, quantity, conversion } of run.shape.grids) {
    say(
      `The gridded rain "${id}" goes in as its maker made it: what was corrected in it, and whether it was adjusted to gauges already, is not known.`,
      "Gauges that it has seen already are no check of it, and adjusting to them again counts them twice.",
    );
    for (const { relation } of conversion?.relations ?? []) {
      const caution = relationCaution(relation);
      if (caution !== undefined) say(`Grids ${id}: ${caution}.`);
    }
    if (quantity !== "reflectivityDbz")
      say(
        `"${id}" came as rain: no relation of this run plays a part in it, and its figures under other relations are the same.`,
      );
  }
  for (const proposal of calibrationProposals(run, comparison)) {
    const words = proposalWords(proposal);
    if (words !== undefined) say(words.text, words.detail);
  }
  if (district.observedFraction < plan.rain.minObserved) {
    say(
      `Only ${percent(district.observedFraction)} of area and time was observed: the depth is a lower bound.`,
      "What was not seen adds nothing; nothing is scaled up.",
    );
  }
  const bridged = districtMean(run, total.planes.bridgedFraction);
  const edge = districtMean(run, total.planes.edgeFraction);
  if (bridged > MUCH_BRIDGED)
    say(`${percent(bridged)} of the window was bridged between scans further apart than usual.`);
  if (edge > MUCH_BRIDGED)
    say(
      `${percent(edge)} of the window lies before the first or after the last scan and rests on that one scan.`,
    );
  const { adjustment } = comparison;
  if (!adjustment.applied) {
    say(
      run.gauges.gauges.length === 0
        ? "There are no gauges beside this total: nothing checks it."
        : `The total is not adjusted to the gauges: ${adjustment.reason}.`,
    );
  } else {
    if (adjustment.gaugeCount < FEW_GAUGES)
      say(`The adjustment rests on ${adjustment.gaugeCount} gauges only.`);
    if (adjustment.unlimitedFactor !== undefined)
      say(
        `The adjustment's factor met its limit: ${adjustment.unlimitedFactor.toFixed(2)} was cut to ${adjustment.factor.toFixed(2)} (gauge/radar).`,
      );
    for (const note of adjustment.notes) say(`In the adjustment by ${adjustment.title}: ${note}.`);
    if (adjustment.method === "gauges-alone")
      say("The adjusted total is interpolated between gauges: the radar gives it only its shape in time.");
  }
  const doubted = comparison.gauges.filter(({ verdict }) => verdict.verdict === "leave out").length;
  if (doubted > 0) {
    say(
      `${doubted} of ${comparison.gauges.length} gauges are doubted and shape nothing unless the plan says so.`,
    );
  }
  for (const { network, status, retrieved } of plan.gauges) {
    if (status !== "provisional") continue;
    say(
      `The readings of network ${network} are provisional${retrieved === undefined ? "" : `, as fetched on ${retrieved}`}: the network may still change them.`,
    );
  }
  if (isAtCap(district)) {
    say(
      `${percent(district.cappedFraction)} of the district's depth met the hail cap.`,
      "Where it was heavy rain and not hail, the true depth is larger.",
    );
  }
  const unseenMm = districtMean(run, total.unseenMm);
  if (unseenMm > MUCH_UNSEEN_MM && unseenMm > MUCH_UNSEEN_SHARE * district.radarMm) {
    say(
      `Rain too light or too far for the radars to see may be missing: up to ${unseenMm.toFixed(1)} mm over the district.`,
      "It is what an echo just below detection would have added, the most that may be missing and no estimate.",
    );
  }
  const height = districtMean(run, total.planes.beamHeightAslM);
  if (height > HIGH_BEAM_M) {
    say(
      `The beam stands ${Math.round(height)} m above the sea over the district on average: it may miss what forms or fades below.`,
    );
  }
  if (plan.status === "provisional") say("The status of this run is provisional.");
  return cautions;
}

/** Mean of a plane over the district's observed cells. */
export function districtMean(run: PreparedRun, plane: Float32Array): number {
  let sum = 0;
  let weight = 0;
  const { cells, fraction } = run.district;
  for (let k = 0; k < cells.length; k++) {
    const value = plane[cells[k]];
    if (Number.isNaN(value)) continue;
    sum += fraction[k] * value;
    weight += fraction[k];
  }
  return weight > 0 ? sum / weight : 0;
}

function percent(share: number): string {
  const value = 100 * share;
  if (value > 0 && value < 1) return "under 1 %";
  return `${value > 99 && value < 100 ? 99 : Math.round(value)} %`;
}
