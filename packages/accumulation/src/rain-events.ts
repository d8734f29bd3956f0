import { depthOfSteps, type RainSeries, type SpanDepth, type StepRange } from "./rain-series.ts";

/** What makes an event. */
export interface EventRule {
  /** Dry time between wet steps from which on a new event begins; equality parts them. */
  readonly dryTimeMs: number;
  /** Events of less depth are dropped, and counted. */
  readonly minDepthMm: number;
  /** Depth of a step from which on it is wet; a step without any rain never is. */
  readonly wetMm: number;
  /** A step without rain is dry only where at least this share of it was observed. */
  readonly minObserved: number;
}

/** Rain between two dry times, from its first wet step to its last. */
export interface RainEvent extends SpanDepth {
  readonly steps: StepRange;
  /** Steps within the event that were neither wet nor dry, since nobody saw them. */
  readonly unseenSteps: number;
  /** Whether the series begins, or ends, less than the dry time away: the event may be longer than what is known of it. */
  readonly mayBeginEarlier: boolean;
  readonly mayEndLater: boolean;
}

export interface RainEvents {
  readonly events: readonly RainEvent[];
  /** Events below the least depth, and what fell in them. */
  readonly dropped: { readonly count: number; readonly depthMm: number };
}

/** Depths are compared with this slack, so that 0.1 + 0.2 is 0.3. */
const SLACK_MM = 1e-9;

/**
 * Events of a series: wet steps belong together unless at least the dry time lies between them.
 *
 * A step that was not observed is neither wet nor dry: it ends nothing, adds nothing to the dry time, and is counted
 * where it lies within an event.
 *
 * @remarks How long a dry time parts events is a custom, not a fact: six hours is common practice in urban drainage.
 * Restrepo-Posada and Eagleson (1982), Journal of Hydrology 55, 303-319, take the gap from which on the dry times of a
 * long record are exponentially distributed.
 */
export function rainEvents(series: RainSeries, rule: EventRule): RainEvents {
  const { depthMm, observedFraction, stepMs } = series;
  const minDrySteps = Math.max(1, Math.ceil(rule.dryTimeMs / stepMs - 1e-9));
  const found: { from: number; to: number; dryBefore: number; dryAfter: number; unseen: number }[] = [];
  let open: (typeof found)[number] | undefined;
  let dry = 0;
  let unseen = 0;
  for (let k = 0; k < depthMm.length; k++) {
    const mm = depthMm[k];
    if (mm > 0 && mm >= rule.wetMm - SLACK_MM) {
      if (open === undefined || dry >= minDrySteps) {
        open = { from: k, to: k + 1, dryBefore: dry, dryAfter: 0, unseen: 0 };
        found.push(open);
      } else {
        open.to = k + 1;
        open.unseen += unseen;
      }
      dry = 0;
      unseen = 0;
    } else if (Number.isNaN(mm) || observedFraction[k] < rule.minObserved) unseen++;
    else dry++;
    if (open !== undefined) open.dryAfter = dry;
  }
  const events: RainEvent[] = [];
  const dropped = { count: 0, depthMm: 0 };
  for (const { from, to, dryBefore, dryAfter, unseen: unseenSteps } of found) {
    const steps = { from, to };
    const depth = depthOfSteps(series, steps);
    if (depth.depthMm < rule.minDepthMm - SLACK_MM) {
      dropped.count++;
      dropped.depthMm += depth.depthMm;
      continue;
    }
    events.push({
      ...depth,
      steps,
      unseenSteps,
      mayBeginEarlier: dryBefore < minDrySteps,
      mayEndLater: dryAfter < minDrySteps,
    });
  }
  return { events, dropped };
}
