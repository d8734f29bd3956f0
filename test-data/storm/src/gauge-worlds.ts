import { GAUGES, type GaugeFault, type GaugePlan } from "./gauges.ts";
import { RandomStream } from "./random.ts";

/** The gauges of the demo without their faults, and without the one that stands beyond every radar. */
export const SOUND_GAUGES: readonly GaugePlan[] = GAUGES.filter(({ fault }) => fault !== "outside-grid").map(
  ({ network, id, name, xKm, yKm }) => ({ network, id, name, xKm, yKm }),
);

/** Faults as the seed deals them: each to another gauge of a network whose files can show it. */
export function dealtFaults(seed: number): readonly GaugePlan[] {
  const dealt = new Map<string, GaugeFault>();
  const random = new RandomStream(seed + 7919);
  const deal = (network: GaugePlan["network"], faults: readonly GaugeFault[]): void => {
    const left = SOUND_GAUGES.filter((gauge) => gauge.network === network).map(({ id }) => id);
    for (const fault of faults) {
      const [id] = left.splice(Math.floor(left.length * random.uniform()), 1);
      dealt.set(`${network} ${id}`, fault);
    }
  };
  deal("moor", [
    "dead",
    "dies-mid-storm",
    "partly-blocked",
    "misplaced",
    "clock-60-min-late",
    "spike",
    "duplicated-line",
  ]);
  deal("saltwater", ["inches-as-mm", "missing-hours", "no-station-entry"]);
  return SOUND_GAUGES.map((gauge) => {
    const fault = dealt.get(`${gauge.network} ${gauge.id}`);
    return fault === undefined ? gauge : { ...gauge, fault };
  });
}

/** Every gauge of one network with the same fault, all others sound. */
export function networkAtFault(network: GaugePlan["network"], fault: GaugeFault): readonly GaugePlan[] {
  return SOUND_GAUGES.map((gauge) => (gauge.network === network ? { ...gauge, fault } : gauge));
}

/** A gauge that stands alone: no other within 10 km of a district 160 km wide, and not at its edge. */
export function lonelyGauge(seed: number): GaugePlan {
  const lonely = SOUND_GAUGES.filter(({ id, network, xKm, yKm }) =>
    SOUND_GAUGES.every(
      (other) =>
        (other.id === id && other.network === network) || Math.hypot(other.xKm - xKm, other.yKm - yKm) >= 10,
    ),
  );
  return lonely[Math.floor(lonely.length * new RandomStream(seed + 104729).uniform())]!;
}
