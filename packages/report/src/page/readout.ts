import type { PageData, PageLayer, PageMap } from "../data/contract.ts";
import { countText } from "../text/numbers.ts";
import { depthText, type Unit } from "./depths.ts";
import { type Fields, valueAt } from "./fields.ts";
import type { Clock } from "./times.ts";

export interface ReadingFrom {
  readonly data: PageData;
  readonly layer: PageLayer;
  readonly fields: Fields;
  readonly index: number;
  readonly frame: number;
  readonly unit: Unit;
  readonly clock: Clock;
}

/** What a cell of the map says: its value with its unit, and that with layer, time and position. */
export function cellWords(
  cell: { readonly column: number; readonly row: number },
  { data, layer, fields, index, frame, unit, clock }: ReadingFrom,
): { value: string; all: string } {
  const value = valueWords(layer, valueAt(fields, index, cell.column, cell.row), fields.step, unit);
  const interval = layer.frames?.intervals[frame];
  const when = interval === undefined ? "" : `, ${clock.span(interval)}`;
  const mean = fields.block > 1 ? ` (mean of ${fields.block} × ${fields.block} cells)` : "";
  return { value, all: `${layer.label}${when}: ${value}${mean} · ${positionWords(data.map, cell)}` };
}

/** A value of a layer with its unit; NaN is "not observed". */
export function valueWords(layer: PageLayer, value: number, step: number, unit: Unit): string {
  if (Number.isNaN(value)) return "not observed";
  if (layer.names !== undefined) return layer.names[value] ?? "not known";
  switch (layer.unit) {
    case "mm":
      // What rounds to no step at all may still be a little.
      return value === 0
        ? `less than ${depthText(step / 2, unit)} ${unit}`.replace("<\u202f", "")
        : `${depthText(value, unit)} ${unit}`;
    case "%":
      return `${value.toFixed(1).replace(/\.0$/, "")} %`;
    case "m":
      return `${countText(value)} m`;
    case "dB":
      return `${value.toFixed(1).replace("-", "\u2212")} dB`;
    default:
      return String(value);
  }
}

/** Where the middle of a cell lies: on the grid, and on Earth where that is known. */
export function positionWords(map: PageMap, { column, row }: { column: number; row: number }): string {
  const eastKm = (map.westM + (column + 0.5) * map.cellM) / 1000;
  const northKm = (map.northM - (row + 0.5) * map.cellM) / 1000;
  const km = (value: number) => value.toFixed(map.cellM % 1000 === 0 ? 1 : 2).replace("-", "\u2212");
  const grid = `${km(eastKm)} km east, ${km(northKm)} km north`;
  const earth = geographic(map, (column + 0.5) / map.nx, (row + 0.5) / map.ny);
  return earth === undefined ? grid : `${earth} · ${grid}`;
}

/** Latitude and longitude between the corners of the lattice, to a thousandth of a degree. */
function geographic({ lattice }: PageMap, x: number, y: number): string | undefined {
  if (lattice === undefined) return undefined;
  const { across, down, lonDeg, latDeg } = lattice;
  const column = Math.min(across - 1, Math.floor(x * across));
  const row = Math.min(down - 1, Math.floor(y * down));
  const [east, south] = [x * across - column, y * down - row];
  const at = (values: readonly number[], r: number, c: number) => values[r * (across + 1) + c];
  const between = (values: readonly number[]) =>
    (1 - south) * ((1 - east) * at(values, row, column) + east * at(values, row, column + 1)) +
    south * ((1 - east) * at(values, row + 1, column) + east * at(values, row + 1, column + 1));
  const [lat, lon] = [between(latDeg), between(lonDeg)];
  return `${Math.abs(lat).toFixed(3)}° ${lat < 0 ? "S" : "N"}, ${Math.abs(lon).toFixed(3)}° ${lon < 0 ? "W" : "E"}`;
}
