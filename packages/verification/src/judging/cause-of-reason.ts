import { fromDecibels } from "../numbers.ts";
import { type LikelyCause, likelyCause } from "../verdict.ts";
import { type Account, isBlockedWhole } from "./account.ts";
import type { NetworkFault } from "./networks.ts";
import { clockWords, direction, times, utc } from "./words.ts";

/** The cause that a gauge's reason for not fitting stands for; that of its network where all of it is off. */
export function causeOfReason(
  { reason }: Account,
  network: NetworkFault | undefined,
): LikelyCause | undefined {
  if (network !== undefined) {
    const { fault } = network;
    if (fault.kind === "clock") {
      const { minutesLate } = fault;
      return likelyCause("network-clock", clockWords(minutesLate), { minutesLate });
    }
    const details = fault.mistakes.map(({ words }) => words).join(", or ");
    return likelyCause("network-unit", details, { factor: fromDecibels(fault.offsetDb) });
  }
  switch (reason?.kind) {
    case "silent":
      return reason.silent.wholeWindow
        ? likelyCause("dead")
        : likelyCause("dies-part-way", `silent from ${utc(reason.silent.startEpochMs)}`);
    case "unit":
      return likelyCause("wrong-unit", reason.mistakes.map(({ words }) => words).join(", or "), {
        factor: fromDecibels(reason.factor.offsetDb),
      });
    case "blocked": {
      const factor = fromDecibels(reason.factor.offsetDb);
      return likelyCause(
        isBlockedWhole(reason.factor) ? "blocked" : "partly-blocked",
        `reads ${times(factor)} what it should`,
        { factor },
      );
    }
    case "clock": {
      const { minutesLate } = reason.clock;
      return likelyCause("clock-off", clockWords(minutesLate), { minutesLate });
    }
    case "place": {
      const { distanceKm, eastKm, northKm } = reason.place;
      return likelyCause(
        "misplaced",
        `fits a place ${distanceKm.toFixed(0)} km to the ${direction(eastKm, northKm)}`,
      );
    }
    default:
      return undefined;
  }
}
