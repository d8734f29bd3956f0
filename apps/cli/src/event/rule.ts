import { durationMs } from "@rainreckon/accumulation";
import type { Plan } from "../plan/schema.ts";
import { lengthText } from "../ui/numbers.ts";
import type { AccountAsked } from "./place-account.ts";

/** Where nobody says otherwise. Six hours are common practice in urban drainage; five millimetres are a house rule. */
const DEFAULT_DRY_TIME = "PT6H";
const DEFAULT_MIN_DEPTH_MM = 5;

/** The rule by which rain is cut into events, and whose it is. */
export interface RuleChosen {
  readonly rule: AccountAsked["rule"];
  readonly whose: string;
  readonly words: string;
}

/** What the command line says of the rule. */
export interface RuleAsked {
  readonly dryTimeMs: number | undefined;
  readonly thresholdMm: number | undefined;
}

/** The rule of the command line, else of the plan, else the usual one. */
export function ruleOf(plan: Plan, { dryTimeMs, thresholdMm }: RuleAsked): RuleChosen {
  const { events } = plan;
  const dryMs = dryTimeMs ?? durationMs(events?.dryTime ?? DEFAULT_DRY_TIME);
  const minDepthMm = thresholdMm ?? events?.minDepthMm ?? DEFAULT_MIN_DEPTH_MM;
  const owner = (asked: unknown, planned: unknown, otherwise: string) => {
    if (asked !== undefined) return "the command line";
    if (planned === undefined) return otherwise;
    return events?.rule === undefined ? "the plan" : `the plan: ${events.rule}`;
  };
  const dryOwner = owner(dryTimeMs, events?.dryTime, "nobody's choice, common practice");
  const depthOwner = owner(thresholdMm, events?.minDepthMm, "nobody's choice, house rule");
  const whose = dryOwner === depthOwner ? dryOwner : `dry time: ${dryOwner}; least depth: ${depthOwner}`;
  const wetMmPerHour = plan.rain.minRateMmPerHour;
  return {
    rule: { dryTimeMs: dryMs, minDepthMm, wetMmPerHour, minObserved: plan.rain.minObserved },
    whose,
    words: `at least ${lengthText(dryMs)} dry between events, ${minDepthMm} mm or more in each; dry is less than ${wetMmPerHour} mm/h over a step (the plan's least rate)`,
  };
}
