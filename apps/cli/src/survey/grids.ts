import path from "node:path";
import type { GriddedFile, GridPlace } from "@rainreckon/formats";
import { isoUtc } from "../ui/numbers.ts";
import type { SeenGrid } from "./grid-sources.ts";

/** What a file of gridded layers holds, one finding for each quantity. */
export function gridFindings(file: string, grid: GriddedFile): SeenGrid[] {
  const quantities = [...new Set(grid.headers.map(({ quantity }) => quantity))];
  return quantities.map((quantity) => {
    const layers = grid.headers.filter((header) => header.quantity === quantity);
    const first = layers[0]!;
    const ends = [...new Set(layers.map(({ endEpochMs }) => endEpochMs))].sort((a, b) => a - b);
    const steps = ends.slice(1).map((end, index) => (end - ends[index]!) / 60_000);
    const median = steps.sort((a, b) => a - b)[Math.floor(steps.length / 2)];
    const finding = {
      file,
      name: path.basename(file),
      format: grid.format,
      quantity,
      layerCount: layers.length,
      nx: first.nx,
      ny: first.ny,
      place: placeText(first.place),
      firstStart: isoUtc(Math.min(...layers.map(({ startEpochMs }) => startEpochMs))),
      lastEnd: isoUtc(Math.max(...layers.map(({ endEpochMs }) => endEpochMs))),
      stepMinutes: median === undefined ? null : Number(median.toFixed(3)),
      remarks: [...new Set(layers.flatMap(({ remarks }) => remarks))],
    };
    return { finding, headers: layers };
  });
}

function placeText(place: GridPlace): string {
  if (place.kind === "positions") return "a position for each cell";
  const isDegrees = /\+proj=longlat|EPSG:4326/.test(place.crs);
  const unit = isDegrees ? "°" : " m";
  const number = (size: number) => Number(size.toPrecision(6));
  return `cells of ${number(place.cellWidth)}${unit} by ${number(place.cellHeight)}${unit} in ${place.crs}`;
}
