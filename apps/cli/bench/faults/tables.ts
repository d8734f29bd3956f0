import { CAUSES } from "@rainreckon/verification";
import { type Column, textTable } from "../../src/ui/table.ts";
import { blamesRadar, type Judged, LEAST_TRUE_MM } from "./tally.ts";

const right = (head: string): Column => ({ head, align: "right" });
const share = (part: number, whole: number) => (whole === 0 ? "–" : `${((100 * part) / whole).toFixed(1)} %`);

const isFault = ({ planted, trueMm }: Judged) => planted !== null && trueMm >= LEAST_TRUE_MM;
const isGood = ({ planted }: Judged) => planted === null;
const isNetwork = ({ world }: Judged) => world.startsWith("network-");
const typeOf = (judged: Judged) => (isNetwork(judged) ? judged.world : (judged.planted as string));

/** Found and named by type of fault, of those with rain enough. */
export function faultTable(judged: readonly Judged[]): string {
  const faults = judged.filter(isFault);
  const types = [...new Set(faults.map(typeOf))];
  const row = (name: string, of: readonly Judged[]) => {
    const found = of.filter((one) => one.found);
    const named = found.filter((one) => one.named);
    return [
      name,
      String(of.length),
      String(found.length),
      share(found.length, of.length),
      String(named.length),
      share(named.length, found.length),
    ];
  };
  const single = faults.filter((one) => !isNetwork(one));
  return textTable(
    [
      { head: "fault" },
      right("gauges"),
      right("found"),
      right("share"),
      right("named right"),
      right("of found"),
    ],
    [
      ...types.map((type) =>
        row(
          type,
          faults.filter((one) => typeOf(one) === type),
        ),
      ),
      ...(single.length === 0 ? [] : [row("all single faults", single)]),
    ],
  );
}

/** Sound gauges by world: how many were doubted. */
export function goodTable(judged: readonly Judged[]): string {
  const worlds = [...new Set(judged.map(({ world }) => world))];
  const row = (name: string, of: readonly Judged[]) => {
    const withVerdict = of.filter(({ verdict }) => verdict !== undefined);
    const care = withVerdict.filter(({ verdict }) => verdict?.verdict === "use with care").length;
    const out = withVerdict.filter(({ verdict }) => verdict?.verdict === "leave out").length;
    const little = withVerdict.filter(
      ({ verdict }) => verdict?.verdict === "too little rain to judge",
    ).length;
    const cells = [withVerdict.length, little, care, out].map(String);
    return [
      name,
      ...cells,
      share(care + out, withVerdict.length),
      String(withVerdict.filter(blamesRadar).length),
    ];
  };
  const good = judged.filter(isGood);
  return textTable(
    [
      { head: "sound gauges of" },
      ...["gauges", "too little rain", "with care", "left out", "doubted", "radar named"].map(right),
    ],
    [
      ...worlds.map((world) =>
        row(
          world,
          good.filter((one) => one.world === world),
        ),
      ),
      row("all", good),
    ],
  );
}

/** Causes of sound gauges in use, by world. */
export function causeTable(judged: readonly Judged[]): string {
  const counts = new Map<string, number>();
  for (const { world, verdict } of judged.filter(isGood)) {
    if (verdict?.cause === undefined) continue;
    const key = `${world}\t${CAUSES[verdict.cause.name].words}`;
    counts.set(key, (counts.get(key) ?? 0) + 1);
  }
  return textTable(
    [{ head: "world" }, { head: "cause named at a sound gauge" }, right("gauges")],
    [...counts].map(([key, count]) => [...key.split("\t"), String(count)]),
  );
}

/** Each fault that was missed or misnamed, and each sound gauge that was doubted. */
export function missLines(judged: readonly Judged[]): string[] {
  return judged
    .filter((one) => (isFault(one) ? !one.named : isGood(one) && one.found))
    .map(({ world, seed, network, id, planted, trueMm, verdict }) => {
      const made =
        verdict === undefined ? "no verdict" : `${verdict.verdict}, ${verdict.cause?.words ?? "no cause"}`;
      return `${world} ${seed}, ${network} ${id}, ${planted ?? "sound"}, ${trueMm.toFixed(1)} mm: ${made}. ${verdict?.evidence ?? ""}`;
    });
}

/** What was to be reached, and whether it was. */
export function aimLines(judged: readonly Judged[]): string[] {
  const single = judged.filter((one) => isFault(one) && !isNetwork(one));
  const found = single.filter((one) => one.found);
  const types = [...new Set(single.map(typeOf))];
  const shareOf = (type: string) => {
    const of = single.filter((one) => typeOf(one) === type);
    return of.filter((one) => one.found).length / of.length;
  };
  const worst = Math.min(...types.map(shareOf));
  const good = judged.filter((one) => isGood(one) && one.verdict !== undefined);
  const doubted = good.filter((one) => one.found).length;
  const network = judged.filter((one) => isFault(one) && isNetwork(one));
  const line = (name: string, value: number, kept: boolean) =>
    `${name}: ${Number.isFinite(value) ? `${(100 * value).toFixed(1)} %` : "–"}, ${kept ? "kept" : "MISSED"}`;
  const lines: string[] = [];
  if (single.length > 0) {
    const named = found.filter((one) => one.named).length / found.length;
    lines.push(
      line(
        "found over all, at least 80 %",
        found.length / single.length,
        found.length >= 0.8 * single.length,
      ),
      line("found of the worst type, at least 70 %", worst, worst >= 0.7),
      line("named right of those found, at least 80 %", named, named >= 0.8),
    );
  }
  if (network.length > 0) {
    const named = network.filter((one) => one.named).length / network.length;
    lines.push(line("gauges of a network at fault put down to the network", named, named >= 0.8));
  }
  if (good.length > 0) {
    lines.push(
      line("sound gauges doubted, at most 3 %", doubted / good.length, doubted <= 0.03 * good.length),
    );
  }
  return lines;
}
