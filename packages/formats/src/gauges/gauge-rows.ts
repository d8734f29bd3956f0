import { displayText } from "./display-text.ts";
import type { FileNotices } from "./file-notices.ts";
import { place } from "./file-notices.ts";
import type { GaugeFileCounts } from "./gauge-file-counts.ts";
import { indices, pick } from "./picking.ts";
import type { SettledTimes } from "./settle-times.ts";
import type { Track, TrackColumn } from "./track.ts";

/** The rows of one gauge from all files: instants ascending, each once. */
export interface GaugeRows {
  readonly id: string;
  /** Shape [n] each. Values in mm (mm/h of intensities), NaN missing. */
  readonly epochMs: Float64Array;
  readonly values: Float64Array;
  readonly quality: Uint8Array;
  readonly line: Float64Array;
  /** Shape [n]: which of `paths`. */
  readonly pathIndex: Float64Array;
  readonly paths: readonly string[];
  readonly decimals: number;
  readonly uncertain: Track["uncertain"];
}

/** A column of a track whose times are settled. */
export interface GaugePiece {
  readonly track: Track;
  readonly column: TrackColumn;
  readonly times: SettledTimes;
}

/**
 * Joins the pieces of one gauge and settles rows of the same instant.
 *
 * Equal values count once. Of different values the first one counts, unless it is missing and the other
 * is not. The worse quality code holds.
 */
export function joinPieces(
  id: string,
  pieces: readonly GaugePiece[],
  counts: GaugeFileCounts,
  notices: FileNotices,
): GaugeRows {
  const paths = [...new Set(pieces.map((piece) => piece.track.path))];
  const total = pieces.reduce((sum, piece) => sum + piece.times.rows.length, 0);
  const epochMs = new Float64Array(total);
  const values = new Float64Array(total);
  const quality = new Float64Array(total);
  const line = new Float64Array(total);
  const pathIndex = new Float64Array(total);
  let filled = 0;
  for (const { track, column, times } of pieces) {
    const pieceValues = column.values.view();
    const pieceQuality = column.quality.view();
    const pieceLines = track.line.view();
    const piecePath = paths.indexOf(track.path);
    for (let index = 0; index < times.rows.length; index++) {
      const row = times.rows[index];
      epochMs[filled] = times.epochMs[index];
      values[filled] = pieceValues[row];
      quality[filled] = pieceQuality[row];
      line[filled] = pieceLines[row];
      pathIndex[filled] = piecePath;
      filled += 1;
    }
  }

  const order = indices(total);
  if (!isAscending(epochMs)) order.sort((a, b) => epochMs[a] - epochMs[b] || a - b);
  let kept = 0;
  for (let index = 0; index < total; index++) {
    const row = order[index];
    const before = kept > 0 ? order[kept - 1] : -1;
    if (before < 0 || epochMs[row] !== epochMs[before]) {
      order[kept] = row;
      kept += 1;
      continue;
    }
    const equal = Object.is(values[row], values[before]) || values[row] === values[before];
    if (equal) counts.duplicatesSame += 1;
    else {
      counts.duplicatesDifferent += 1;
      const firstIsMissing = Number.isNaN(values[before]);
      const samePath = pathIndex[row] === pathIndex[before];
      notices.tell(
        "rows of one gauge and time with different values",
        `two readings of gauge "${displayText(id, 60)}" at ${utcText(epochMs[row])} differ: ${
          firstIsMissing ? "the first is missing, so the second" : "the first"
        } counts`,
        samePath
          ? paths[pathIndex[row]]
          : `${place(paths[pathIndex[before]], [line[before]])} and ${paths[pathIndex[row]]}`,
        samePath ? [line[before], line[row]] : [line[row]],
        "delete the wrong one",
      );
      if (firstIsMissing) values[before] = values[row];
    }
    quality[before] = Math.max(quality[before], quality[row]);
  }

  const chosen = order.subarray(0, kept);
  return {
    id,
    epochMs: pick(epochMs, chosen),
    values: pick(values, chosen),
    quality: new Uint8Array(pick(quality, chosen)),
    line: pick(line, chosen),
    pathIndex: pick(pathIndex, chosen),
    paths,
    decimals: pieces.reduce((most, piece) => Math.max(most, piece.column.decimals), 0),
    uncertain: pieces.flatMap((piece) => piece.track.uncertain),
  };
}

function isAscending(values: Float64Array): boolean {
  for (let index = 1; index < values.length; index++) if (values[index] < values[index - 1]) return false;
  return true;
}

/** An instant for people: 2031-05-03T12:05Z, with seconds where they are not 0. */
export function utcText(epochMs: number): string {
  const text = new Date(epochMs).toISOString();
  return text.endsWith(":00.000Z") ? `${text.slice(0, 16)}Z` : text.replace(".000Z", "Z");
}
