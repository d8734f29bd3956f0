import { gaugeKey } from "@rainreckon/core";
import type { GaugeEvidence, GaugeOverride, JudgeContext } from "../evidence.ts";
import {
  CHECKS,
  type Finding,
  type GaugeVerdict,
  type LikelyCause,
  likelyCause,
  type Verdict,
} from "../verdict.ts";
import { type Account, accountOf } from "./account.ts";
import { causeOfReason } from "./cause-of-reason.ts";
import { findingsAlone } from "./findings-alone.ts";
import { findingsBeside } from "./findings-beside.ts";
import { type NetworkFault, networkFaults } from "./networks.ts";
import { withPartialReasons } from "./parts.ts";
import { ASK_DB, radarSide } from "./radar-side.ts";
import { type ReferenceLevel, referenceLevel } from "./reference-level.ts";
import { JUDGE_MM, subjectOf } from "./subject.ts";
import { mm } from "./words.ts";

/** Level of all gauges beside the radar from which the radar as a whole is named, dB. House rule. */
const OFF_LEVEL_DB = 1.5;
/** A misfit of a gauge in use from which one asks for its cause. */
const ASK_MISFIT = 3;
/** Gauges that must fit the radar before it speaks against another one. House rule. */
const LEAST_WITNESSES = 3;
/** Share of a gauge's rain, and of what it has more than the radar, that fell within one hour of a single shower. */
const ONE_SHOWER_SHARE = 0.75;

/**
 * What can be believed of each gauge, from its own readings, from the radar over it and from all other gauges.
 *
 * Everything that could be wrong is looked for; what is found stands among the findings. The cause is decided
 * by a written rule over all of them, in this order:
 *
 * | evidence | cause | verdict |
 * | --- | --- | --- |
 * | a reading beyond every record, or one that neither neighbours in time nor the radar know of | impossible value, spike | leave out |
 * | six or more readings of one depth on end, too large for drizzle | repeated value, flat line | leave out |
 * | most gauges of its network need the same shift or unit | whole network off | leave out |
 * | does not fit the radar, and fits with one change: silence, factor, shift, place | dead, dies part way, unit, blocked, clock, misplaced | leave out |
 * | all readings are those of another gauge | duplicate | leave out |
 * | rows given twice, a counter that restarted, a fifth of the readings missing, tips on a dry day, drips after the rain, less caught the harder it rains | their names | use with care |
 * | does not fit, no change mends it, and the radar's sight of the place has a symptom | the radar's | use |
 * | does not fit, and the excess is one shower's | a shower smaller than a cell | use |
 * | does not fit, nothing explains it | unexplained | use with care |
 * | less than 3 mm on either side, or three wet steps | | too little rain to judge |
 *
 * To be different is no ground alone: convection is local. Silence needs no witness but the radar at the level of the
 * others: where the radar is worth nothing, sound gauges fit it badly too, and nobody is blamed. Where fewer than three
 * other gauges fit the radar, a gauge that does not is used with care.
 * An override is obeyed and said; the verdict of the checks stands beside it.
 *
 * Pure, and quick enough for every fold of a cross-validation.
 *
 * @param gauges - all gauges of the run
 * @returns one verdict per gauge, in the same order
 */
export function judgeGauges(gauges: readonly GaugeEvidence[], context: JudgeContext): GaugeVerdict[] {
  const subjects = gauges.map((gauge) => subjectOf(gauge, context.window));
  const reference = referenceLevel(subjects);
  const whole = subjects.map((subject) => accountOf(subject, reference, context));
  const accounts = withPartialReasons(whole, gauges, context);
  const faults = new Map(networkFaults(accounts).map((fault) => [fault.network, fault]));
  const networks = new Set(gauges.map(({ series }) => series.network));
  const isRadarsClock =
    networks.size > 1 &&
    faults.size === networks.size &&
    [...faults.values()].every(({ fault }) => fault.kind === "clock");
  const fits = ({ judgeable, reason }: Account) => judgeable && reason === undefined;
  const witnesses = accounts.filter(fits).length;
  return accounts.map((account, g) => {
    const gauge = gauges[g] as GaugeEvidence;
    const fault = faults.get(gauge.series.network);
    const findings = [
      ...findingsAlone(account, gauges, context),
      ...findingsBeside(account, accounts, reference, fault),
    ].sort((a, b) => CHECKS.indexOf(a.check) - CHECKS.indexOf(b.check));
    const decided = decide(
      account,
      findings,
      fault,
      reference,
      isRadarsClock,
      witnesses - (fits(account) ? 1 : 0),
    );
    const { series } = gauge;
    return withOverride(
      { network: series.network, gaugeId: series.id, findings, ...decided },
      gauge.override,
    );
  });
}

/** Reasons of the gauges that are not trusted, by `gaugeKey`: what `leaveOut` takes. */
export function leftOutReasons(verdicts: readonly GaugeVerdict[]): Map<string, string> {
  return new Map(
    verdicts
      .filter((verdict) => !verdict.trusted)
      .map((verdict) => [gaugeKey({ network: verdict.network, id: verdict.gaugeId }), verdict.leftOutReason]),
  );
}

type Judgement = Omit<GaugeVerdict, "trusted" | "leftOutReason">;
type Decision = Pick<GaugeVerdict, "verdict" | "cause" | "evidence">;

/** Findings that decide alone, the gravest first, and what they come to. */
const DECISIVE: readonly (readonly [check: Finding["check"], verdict: Verdict])[] = [
  ["rate limits", "leave out"],
  ["isolated spike", "leave out"],
  ["flat line", "leave out"],
  ["repeated value", "leave out"],
];
const ASKING_CARE: readonly Finding["check"][] = [
  "duplicates",
  "counter resets",
  "missing readings",
  "test tips",
  "melt",
  "late release",
  "rate dependence",
  "double mass",
  "tip resolution",
];

function decide(
  account: Account,
  findings: readonly Finding[],
  fault: NetworkFault | undefined,
  reference: ReferenceLevel,
  isRadarsClock: boolean,
  witnesses: number,
): Decision {
  const of = (check: Finding["check"]) => findings.find((finding) => finding.check === check);
  const by = (verdict: Verdict, cause: LikelyCause | undefined, ...sentences: string[]): Decision => ({
    verdict,
    cause,
    evidence: sentences.filter((sentence) => sentence !== "").join(" "),
  });
  for (const [check, verdict] of DECISIVE) {
    const finding = of(check);
    // Steady rain in a mistaken unit repeats itself too: then its factor explains all of it.
    const isSteady = check === "flat line" || check === "repeated value";
    if (isSteady && (account.reason?.kind === "unit" || account.reason?.kind === "blocked")) continue;
    if (finding?.numbers.settled === 0) return by(verdict, likelyCause(finding.speaksFor), finding.sentence);
  }
  const isDead = account.reason?.kind === "silent" && account.reason.silent.wholeWindow;
  if (fault !== undefined && !isDead) {
    const finding = of(fault.fault.kind === "clock" ? "network clock" : "network unit") as Finding;
    const cause = causeOfReason(account, fault);
    if (isRadarsClock) return by("use with care", likelyCause("radar-clock"), finding.sentence);
    return by("leave out", cause, finding.sentence);
  }
  const { reason } = account;
  if (reason !== undefined && reason.kind !== "unknown") {
    return by(
      witnesses < LEAST_WITNESSES ? "use with care" : "leave out",
      causeOfReason(account, undefined),
      of(checkOf(reason.kind))?.sentence ?? "",
    );
  }
  const { whole } = account.subject.evidence;
  if (!(whole.commonFraction > 0)) {
    return by("too little rain to judge", undefined, `Not compared: ${whole.reason}.`);
  }
  const twin = of("duplicates");
  if (twin?.numbers.sameReadings !== undefined)
    return by("leave out", likelyCause("duplicate"), twin.sentence);
  const sums = sumsSentence(account);
  for (const check of ASKING_CARE) {
    const finding = of(check);
    if (finding !== undefined)
      return by("use with care", likelyCause(finding.speaksFor), finding.sentence, sums);
  }
  const settled = of("rate limits");
  if (settled !== undefined)
    return by("use with care", likelyCause(settled.speaksFor), settled.sentence, sums);
  if (!account.judgeable) {
    return by("too little rain to judge", undefined, sums, `It takes ${JUDGE_MM} mm on either side.`);
  }
  return explained(account, findings, reference, sums, by);
}

/** A gauge with nothing wrong in itself: why it differs, if it does. */
function explained(
  account: Account,
  findings: readonly Finding[],
  reference: ReferenceLevel,
  sums: string,
  by: (verdict: Verdict, cause: LikelyCause | undefined, ...sentences: string[]) => Decision,
): Decision {
  const { subject, misfit, reason } = account;
  const { ratioDb, plain, evidence } = subject;
  const differs = Math.abs(ratioDb) >= ASK_DB || misfit >= ASK_MISFIT || Number.isNaN(ratioDb);
  if (!differs) return by("use", undefined, sums);
  if (Math.abs(reference.levelDb) >= OFF_LEVEL_DB && misfit < ASK_MISFIT) {
    return by("use", likelyCause("radar-level"), sums, "All gauges differ from the radar by about as much.");
  }
  const side = radarSide(evidence.sight, plain.gaugeMm - plain.expectedMm, plain.expectedMm);
  if (side !== undefined) return by("use", likelyCause(side.cause), sums, side.sentence);
  if (ratioDb >= ASK_DB && isOneShower(account)) {
    return by("use", likelyCause("small-shower"), sums, "What it has more fell within an hour.");
  }
  if (reason === undefined) return by("use", undefined, sums);
  const more = findings.find(({ check }) => check === "wet against dry");
  return by("use with care", likelyCause("unexplained"), sums, more?.sentence ?? "");
}

/** Whether most of the rain of a gauge, and of what it has more than the radar, fell within an hour. */
function isOneShower({ subject: { steps }, levelDb }: Account): boolean {
  if (steps === undefined) return false;
  const factor = 10 ** (levelDb / 10);
  const excess = Array.from({ length: steps.count }, (_, k) => {
    const more = steps.gaugeMm[steps.lead + k] - factor * steps.radarMm[k];
    return Number.isNaN(more) ? 0 : Math.max(0, more);
  });
  const perHour = Math.max(1, Math.round(3_600_000 / steps.stepMs));
  const depths = excess.map((_, k) => steps.gaugeMm[steps.lead + k] || 0);
  return [excess, depths].every((part) => {
    const all = part.reduce((sum, depth) => sum + depth, 0);
    const hours = part.map((_, k) => part.slice(k, k + perHour).reduce((sum, depth) => sum + depth, 0));
    return Math.max(...hours) >= ONE_SHOWER_SHARE * all;
  });
}

function checkOf(kind: "silent" | "unit" | "blocked" | "clock" | "place"): Finding["check"] {
  if (kind === "silent") return "silence";
  if (kind === "clock") return "lag";
  if (kind === "place") return "place";
  return kind === "unit" ? "unit" : "ratio over time";
}

function sumsSentence({ subject: { plain } }: Account): string {
  if (!(plain.steps > 0)) return "Gauge and radar observed no time together.";
  const ratio = plain.gaugeMm > 0 ? ` (radar/gauge ${(plain.expectedMm / plain.gaugeMm).toFixed(2)})` : "";
  return `Over the common time: gauge ${mm(plain.gaugeMm)}, radar ${mm(plain.expectedMm)}${ratio}.`;
}

function withOverride(judgement: Judgement, override: GaugeOverride | undefined): GaugeVerdict {
  const { evidence, verdict, cause } = judgement;
  if (override?.verdict === "leave-out") {
    const leftOutReason = `left out by override: ${overrideWords(override)}`;
    const said = `${evidence} Left out by override: ${overrideWords(override)}.`;
    return { ...judgement, evidence: said, trusted: false, leftOutReason };
  }
  if (verdict !== "leave out") return { ...judgement, trusted: true, leftOutReason: "" };
  if (override?.verdict === "use") {
    const said = `${evidence} Used all the same, by override: ${overrideWords(override)}.`;
    return { ...judgement, evidence: said, trusted: true, leftOutReason: "" };
  }
  return { ...judgement, trusted: false, leftOutReason: `doubted: ${cause?.words}` };
}

function overrideWords({ reason, by, date }: GaugeOverride): string {
  return `${reason} (${by}, ${date})`;
}
