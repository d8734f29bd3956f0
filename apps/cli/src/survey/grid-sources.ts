import { InputError, type Interval } from "@rainreckon/core";
import type { GriddedHeader } from "@rainreckon/formats";
import { placeKey } from "../total/grid-shelf.ts";
import { sourceCells } from "../total/source-cells.ts";
import type { GridFinding } from "./findings.ts";
import type { Point } from "./survey-result.ts";

/** What a file of gridded layers holds of one quantity, with what `plan` needs besides. */
export interface SeenGrid {
  readonly finding: GridFinding;
  readonly headers: readonly GriddedHeader[];
}

/** Gridded files that make one entry of a plan: one quantity on the same cells. */
export interface GridSource {
  readonly id: string;
  readonly quantity: "rate" | "depth" | "reflectivity";
  readonly files: readonly string[];
  /** In time order, each once: instants, or the spans of depths. */
  readonly spans: readonly Interval[];
  /** Median time between layers; null for a single one. */
  readonly stepMinutes: number | null;
  /** Outer corners and middles of the edges of its cells; none where its place is not known. */
  readonly outline: readonly Point[];
  /** Whether a plan takes it into the total unless someone says otherwise. */
  readonly inWindow: boolean;
}

const NAMES = { rainRateMmPerHour: "rate", depthMm: "depth", reflectivityDbz: "reflectivity" } as const;
/** Depths need the fewest assumptions, and reflectivity the most. */
const PREFERRED = ["depth", "rate", "reflectivity"] as const;

/**
 * Groups gridded files into sources, and picks those that a total is made of: none where radars make one, else all of
 * one quantity, so that no rain goes in twice.
 */
export function gridSources(seen: readonly SeenGrid[], hasRadars: boolean): GridSource[] {
  const groups = new Map<string, SeenGrid[]>();
  for (const grid of seen) {
    for (const key of new Set(grid.headers.map((header) => `${header.quantity} ${placeKey(header)}`))) {
      const headers = grid.headers.filter((header) => `${header.quantity} ${placeKey(header)}` === key);
      groups.set(key, [...(groups.get(key) ?? []), { ...grid, headers }]);
    }
  }
  const counts = new Map<string, number>();
  const sources = [...groups.values()].map((group): GridSource => {
    const headers = group.flatMap((one) => one.headers);
    const quantity = NAMES[headers[0].quantity];
    const count = (counts.get(quantity) ?? 0) + 1;
    counts.set(quantity, count);
    const spans = spansOf(headers, quantity === "depth");
    return {
      id: count === 1 ? quantity : `${quantity}-${count}`,
      quantity,
      files: [...new Set(group.map(({ finding }) => finding.file))].sort(),
      spans,
      stepMinutes: medianStepMinutes(spans),
      outline: outlineOf(headers[0]),
      inWindow: false,
    };
  });
  const makesTotal = ({ quantity, spans }: GridSource) => spans.length > (quantity === "depth" ? 0 : 1);
  const chosen = PREFERRED.find((quantity) =>
    sources.some((source) => source.quantity === quantity && makesTotal(source)),
  );
  return sources.map((source) => ({
    ...source,
    inWindow: !hasRadars && source.quantity === chosen && makesTotal(source),
  }));
}

function spansOf(headers: readonly GriddedHeader[], isDepth: boolean): Interval[] {
  const spans = headers.map(({ startEpochMs, endEpochMs }) => {
    const mid = (startEpochMs + endEpochMs) / 2;
    return isDepth ? { startEpochMs, endEpochMs } : { startEpochMs: mid, endEpochMs: mid };
  });
  const apart = new Map(spans.map((span) => [`${span.startEpochMs},${span.endEpochMs}`, span]));
  return [...apart.values()].sort((a, b) => a.startEpochMs - b.startEpochMs || a.endEpochMs - b.endEpochMs);
}

function medianStepMinutes(spans: readonly Interval[]): number | null {
  const steps = spans.slice(1).map((span, k) => span.endEpochMs - spans[k].endEpochMs);
  const median = steps.sort((a, b) => a - b)[Math.floor(steps.length / 2)];
  return median === undefined ? null : Number((median / 60_000).toFixed(3));
}

function outlineOf(header: GriddedHeader): Point[] {
  try {
    const cells = sourceCells(header);
    const { nx, ny } = cells;
    if (cells.kind === "positions") {
      const [right, below] = [nx - 1, (ny - 1) * nx];
      return [0, right, below, below + right].map((k) => ({
        lonDeg: cells.lonDeg[k],
        latDeg: cells.latDeg[k],
      }));
    }
    const { map, west, north, cellWidth, cellHeight } = cells;
    const corners = [0, 0.5, 1].flatMap((across) => [0, 0.5, 1].map((down) => [across, down] as const));
    return corners.flatMap(([across, down]) => {
      const [x, y] = [west + across * nx * cellWidth, north - down * ny * cellHeight];
      const [lonDeg, latDeg] = map.geographic ? [x, y] : map.inverse(x, y);
      return Number.isFinite(lonDeg) && Number.isFinite(latDeg) ? [{ lonDeg, latDeg }] : [];
    });
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    return [];
  }
}
