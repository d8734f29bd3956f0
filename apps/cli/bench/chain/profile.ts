import { Session } from "node:inspector/promises";

/** CPU seconds that a piece of work takes, system calls and the collector's threads included. */
export async function cpuSecondsOf(work: () => Promise<void>): Promise<number> {
  const before = process.cpuUsage();
  await work();
  const { user, system } = process.cpuUsage(before);
  return (user + system) / 1e6;
}

/** Time is put down to the innermost of these functions that is on the stack. */
const STEPS: ReadonlyMap<string, string> = new Map([
  ["openScans", "open files"],
  ["readSweep", "decode"],
  ["polarEcho", "stored numbers to physical ones"],
  ["forSweep", "lookup"],
  ["screenSweep", "screening"],
  ["correctBlockage", "blockage"],
  ["joinBlockage", "blockage"],
  ["correctGas", "gas"],
  ["workUpPhase", "phase (PHIDP, KDP)"],
  ["correctAttenuation", "attenuation by rain"],
  ["rainTypeOfGates", "rain type"],
  ["correctProfile", "vertical profile"],
  ["gateRates", "rain rate"],
  ["gateRatesUnder", "rain rate, other relations"],
  ["#companions", "companions and tolls"],
  ["trustOf", "companions and tolls"],
  ["count", "counts"],
  ["countProfile", "counts"],
  ["countCapped", "counts"],
  // Methods stand in a profile without their class: a builder of layers is told by what it alone calls.
  ["canFill", "grid"],
  ["gatherRates", "grid"],
  ["gatherCapped", "grid"],
  ["gatherVariant", "grid"],
  ["gatherMean", "grid"],
  ["#addCompanions", "grid"],
  ["runUnit", "sums in time, blending and the rest"],
]);

/** Shares of the time of a piece of work by step, largest first; samples of 0.5 ms. */
export async function sharesOf(
  work: () => Promise<void>,
): Promise<{ readonly step: string; readonly share: number }[]> {
  const session = new Session();
  session.connect();
  await session.post("Profiler.enable");
  await session.post("Profiler.setSamplingInterval", { interval: 500 });
  await session.post("Profiler.start");
  await work();
  const { profile } = await session.post("Profiler.stop");
  session.disconnect();
  const byId = new Map(profile.nodes.map((node) => [node.id, node]));
  const stepOf = new Map<number, string>();
  const walk = (id: number, above: string): void => {
    const node = byId.get(id);
    if (node === undefined) return;
    const name = node.callFrame.functionName;
    // A bundle tells functions of one name apart by a number.
    const known = STEPS.get(name.replace(/\d+$/, ""));
    const step = name === "(garbage collector)" ? "collecting garbage" : (known ?? above);
    stepOf.set(id, step);
    for (const child of node.children ?? []) walk(child, step);
  };
  walk(profile.nodes[0]?.id ?? 0, "all else");
  const sums = new Map<string, number>();
  let all = 0;
  for (const [k, id] of (profile.samples ?? []).entries()) {
    const name = byId.get(id)?.callFrame.functionName;
    if (name === "(idle)" || name === "(program)") continue;
    const microseconds = profile.timeDeltas?.[k] ?? 0;
    const step = stepOf.get(id) ?? "all else";
    sums.set(step, (sums.get(step) ?? 0) + microseconds);
    all += microseconds;
  }
  return [...sums].map(([step, sum]) => ({ step, share: sum / all })).toSorted((a, b) => b.share - a.share);
}
