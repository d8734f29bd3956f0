import { cellCentre, InputError } from "@rainreckon/core";
import { displayText } from "@rainreckon/formats";
import { nearest } from "../text/nearest.ts";
import type { GaugeInput } from "../total/gauges.ts";
import { placePoint } from "../total/places.ts";
import type { PreparedRun } from "../total/prepare.ts";
import { placeText } from "../ui/numbers.ts";

/** Geographic position, WGS 84. */
export interface LonLat {
  readonly lonDeg: number;
  readonly latDeg: number;
}

/** What an account is asked of. */
export interface Asked {
  readonly points: readonly LonLat[];
  /** "NETWORK/ID", or "ID" where no two networks have it. */
  readonly gauges: readonly string[];
  readonly catchments: readonly string[];
}

/** A place of which the cell is accounted for. */
export interface AskedPoint extends LonLat {
  readonly name: string;
  readonly cell: number;
  readonly gauge: GaugeInput | undefined;
}

/** What of a run is needed to find places on it. */
export type PlacesOfRun = Pick<PreparedRun, "grid" | "map" | "gauges" | "catchments">;

/** A catchment, with its place in the run's list. */
export interface AskedArea {
  readonly index: number;
  readonly catchment: PreparedRun["catchments"][number];
}

/**
 * Finds what was asked for on the grid of a run.
 *
 * @throws InputError (kind "usage") for a position outside the grid, and a gauge or catchment that takes no part
 */
export function findAsked(
  run: PlacesOfRun,
  asked: Asked,
): { readonly points: AskedPoint[]; readonly areas: AskedArea[] } {
  const points = [
    ...asked.points.map((point): AskedPoint => ({ ...point, ...placed(run, point), gauge: undefined })),
    ...asked.gauges.map((name): AskedPoint => {
      const gauge = findGauge(run, name);
      const { lonDeg, latDeg } = gauge.station;
      return { lonDeg, latDeg, cell: gauge.cell, name: gaugeName(gauge), gauge };
    }),
  ];
  return { points, areas: asked.catchments.map((id) => findCatchment(run, id)) };
}

function placed(
  run: Pick<PreparedRun, "grid" | "map">,
  point: LonLat,
): { readonly cell: number; readonly name: string } {
  const name = placeText(point.lonDeg, point.latDeg);
  const { cell } = placePoint(run.grid, run.map, point, "nearest");
  if (cell >= 0) return { cell, name };
  const { nx, ny } = run.grid;
  const corner = (index: number) => {
    const { xM, yM } = cellCentre(run.grid, index);
    const [lonDeg, latDeg] = run.map.inverse(xM, yM);
    return placeText(lonDeg, latDeg);
  };
  throw usage(
    "this place lies outside the grid of the run",
    name,
    `the grid reaches from ${corner(0)} to ${corner(nx * ny - 1)}; give latitude first, then longitude`,
  );
}

/** "network/id" */
export function gaugeName({ series }: GaugeInput): string {
  return `${series.network}/${series.id}`;
}

function findGauge({ gauges: { gauges } }: PlacesOfRun, asked: string): GaugeInput {
  const exact = gauges.find((gauge) => gaugeName(gauge) === asked);
  if (exact !== undefined) return exact;
  const named = gauges.filter(({ series }) => series.id === asked);
  if (named.length === 1) return named[0] as GaugeInput;
  if (named.length > 1) {
    throw usage(
      `${counted(named.length)} networks have a gauge of this id`,
      `--gauge ${displayText(asked)}`,
      `name the network too: ${named.map((gauge) => displayText(gaugeName(gauge))).join(" or ")}`,
    );
  }
  const names = gauges.flatMap((gauge) => [gaugeName(gauge), gauge.series.id]);
  throw usage(
    "no such gauge takes part in this run",
    `--gauge ${displayText(asked)}`,
    hint(asked, names, "gauges.csv lists those that do"),
  );
}

function findCatchment({ catchments }: PlacesOfRun, asked: string): AskedArea {
  const index = catchments.findIndex(({ id }) => id === asked);
  const byName = index >= 0 ? index : catchments.findIndex(({ name }) => name === asked);
  const catchment = catchments[byName];
  if (catchment !== undefined) return { index: byName, catchment };
  throw usage(
    "no such catchment takes part in this run",
    `--catchment ${displayText(asked)}`,
    catchments.length === 0
      ? "the run has none: its plan names no map of catchments that could be read"
      : hint(
          asked,
          catchments.map(({ id }) => id),
          "catchments.csv lists those that do",
        ),
  );
}

function hint(asked: string, names: readonly string[], otherwise: string): string {
  const meant = nearest(asked, names);
  return meant === undefined ? otherwise : `did you mean "${displayText(meant)}"? ${otherwise}`;
}

function counted(count: number): string {
  return count === 2 ? "two" : String(count);
}

function usage(what: string, where: string, fix: string): InputError {
  return new InputError(what, where, fix, { kind: "usage" });
}
