import { CLASSES_MM, type Covered, KINDS, type Kind, type Unit } from "./measure.ts";

const percent = (share: number) => (Number.isNaN(share) ? "–" : (100 * share).toFixed(0));

interface Tally {
  readonly count: number;
  readonly independent: number;
  readonly inside: number;
  readonly below: number;
  readonly above: number;
  /** Among the independent ones. */
  readonly insideIndependent: number;
  readonly widthMm: number;
  readonly aloneWidthMm: number;
}

function tally(units: readonly Unit[]): Tally {
  const share = (of: readonly Unit[], lies: Unit["lies"]) =>
    of.length === 0 ? Number.NaN : of.filter((unit) => unit.lies === lies).length / of.length;
  const independent = units.filter((unit) => unit.independent);
  const both = units.filter((unit) => unit.aloneWidthMm !== null);
  const mean = (values: readonly number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
  return {
    count: units.length,
    independent: independent.length,
    inside: share(units, "inside"),
    below: share(units, "below"),
    above: share(units, "above"),
    insideIndependent: share(independent, "inside"),
    widthMm: mean((both.length > 0 ? both : units).map(({ widthMm }) => widthMm)),
    aloneWidthMm: mean(both.map(({ aloneWidthMm }) => aloneWidthMm ?? Number.NaN)),
  };
}

const HEAD =
  "| what | units | independent | inside % | below % | above % | inside, independent % | width mm | gauges alone mm |\n| --- | --- | --- | --- | --- | --- | --- | --- | --- |";

function row(name: string, units: readonly Unit[]): string {
  const t = tally(units);
  const mm = (value: number) => (Number.isNaN(value) ? "–" : value.toFixed(2));
  return `| ${name} | ${t.count} | ${t.independent} | ${percent(t.inside)} | ${percent(t.below)} | ${percent(t.above)} | ${percent(t.insideIndependent)} | ${mm(t.widthMm)} | ${mm(t.aloneWidthMm)} |`;
}

const ofKind = (done: readonly Covered[], kind: Kind) =>
  done.flatMap(({ units }) => units.filter((unit) => unit.kind === kind));

/** Points and catchments by world. */
export function worldTable(done: readonly Covered[]): string {
  const worlds = [...new Set(done.map(({ world }) => world))];
  const lines = worlds.flatMap((world) => {
    const own = done.filter((covered) => covered.world === world);
    const reasons = own.filter(({ reason }) => reason !== null);
    const chosen = [...new Set(own.map((covered) => covered.chosen))].join(", ");
    return [
      ...(["points", "catchments"] as const).map((kind) =>
        row(`${world}, ${kind} (${chosen})`, ofKind(own, kind)),
      ),
      ...(reasons.length === 0
        ? []
        : [`| ${world}: ${reasons.length} without intervals, ${reasons[0].reason} |`]),
    ];
  });
  return [HEAD, ...lines].join("\n");
}

/** All worlds together, by kind and class of depth, and by distance to the nearest gauge. */
export function classTable(done: readonly Covered[]): string {
  const lines = KINDS.flatMap((kind) => {
    const units = ofKind(done, kind);
    const classes = CLASSES_MM.map((from, k) => {
      const to = CLASSES_MM[k + 1] ?? Number.POSITIVE_INFINITY;
      const name = Number.isFinite(to) ? `${from}–${to} mm` : `from ${from} mm`;
      return row(
        `${kind}, ${name}`,
        units.filter(({ truthMm }) => truthMm >= from && truthMm < to),
      );
    });
    return [row(`all ${kind}`, units), ...classes];
  });
  const points = ofKind(done, "points");
  const distances = [0, 2, 4, 8, Number.POSITIVE_INFINITY];
  const far = distances.slice(0, -1).map((from, k) =>
    row(
      `points from ${from} km of a gauge on${k + 1 < distances.length - 1 ? `, to ${distances[k + 1]} km` : ""}`,
      points.filter(({ gaugeKm }) => gaugeKm >= from && gaugeKm < distances[k + 1]),
    ),
  );
  return [HEAD, ...lines, ...far].join("\n");
}

/** What is asked of the intervals, and what came of it. */
export function aimLines(done: readonly Covered[]): string[] {
  return (["points", "catchments"] as const).map((kind) => {
    const t = tally(ofKind(done, kind));
    const met = t.insideIndependent >= 0.75 && t.insideIndependent <= 0.85;
    return `${kind}: ${percent(t.insideIndependent)} % of ${t.independent} independent ones inside (aim 75 to 85 %${t.independent >= 200 ? "" : ", wants 200"}): ${met ? "met" : "not met"}; width ${t.widthMm.toFixed(2)} mm, gauges alone ${t.aloneWidthMm.toFixed(2)} mm`;
  });
}
