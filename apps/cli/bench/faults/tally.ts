import { CAUSES, type CauseName, type GaugeVerdict, judgeGauges } from "@rainreckon/verification";
import type { FaultWorld } from "./gather.ts";

/** True rain from which a fault must be found, and a sound gauge counts among the good ones of worlds with faults, mm. */
export const LEAST_TRUE_MM = 5;

/** Causes that name a planted fault rightly. */
const RIGHT_CAUSES: Readonly<Record<string, readonly CauseName[]>> = {
  dead: ["dead"],
  "dies-mid-storm": ["dies-part-way"],
  "inches-as-mm": ["wrong-unit"],
  "clock-60-min-late": ["clock-off"],
  spike: ["spike", "impossible-value"],
  "duplicated-line": ["duplicate"],
  "missing-hours": ["missing-readings"],
  "partly-blocked": ["partly-blocked"],
  misplaced: ["misplaced"],
};
/** And those of a fault that a whole network has. */
const RIGHT_NETWORK_CAUSES: Readonly<Record<string, CauseName>> = {
  "inches-as-mm": "network-unit",
  "clock-60-min-late": "network-clock",
};

/** One gauge with what was planted in it and what came out. */
export interface Judged {
  readonly world: string;
  readonly seed: number;
  readonly network: string;
  readonly id: string;
  readonly trueMm: number;
  /** Null for a sound one. */
  readonly planted: string | null;
  /** Undefined where the run left the gauge out before judging. */
  readonly verdict: GaugeVerdict | undefined;
  /** Doubted (care or leave out), or left out and named. */
  readonly found: boolean;
  readonly named: boolean;
}

/** Judges a world anew and holds every verdict against what was planted. */
export function judgeWorld(gathered: FaultWorld): Judged[] {
  const { world, seed, evidence, context, gauges, leftOut } = gathered;
  const verdicts = new Map(
    judgeGauges(evidence, context).map((verdict) => [`${verdict.network} ${verdict.gaugeId}`, verdict]),
  );
  const isNetworks = world.startsWith("network-");
  return gauges.map(({ network, id, trueMm, fault }) => {
    const key = `${network} ${id}`;
    const verdict = verdicts.get(key);
    const doubted = verdict?.verdict === "use with care" || verdict?.verdict === "leave out";
    // Without a station a gauge cannot be judged; the run must have said so.
    const isUnplaced = fault === "no-station-entry";
    const right = isNetworks ? [RIGHT_NETWORK_CAUSES[fault ?? ""]] : (RIGHT_CAUSES[fault ?? ""] ?? []);
    const named = isUnplaced
      ? leftOut.includes(key)
      : fault !== null && verdict?.cause !== undefined && right.includes(verdict.cause.name);
    return {
      world,
      seed,
      network,
      id,
      trueMm,
      planted: fault,
      verdict,
      found: isUnplaced ? leftOut.includes(key) : doubted,
      named,
    };
  });
}

/** Whether a verdict puts a difference on the radar's side. */
export function blamesRadar({ verdict }: Judged): boolean {
  return verdict?.cause !== undefined && CAUSES[verdict.cause.name].blame === "radar";
}
