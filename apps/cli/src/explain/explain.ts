import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { InputError, type Interval } from "@rainreckon/core";
import { readTotals } from "@rainreckon/formats";
import { rangeAt } from "../total/adjust.ts";
import type { PreparedRun } from "../total/prepare.ts";
import { isoUtc } from "../ui/numbers.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { AdjustedBy } from "./adjusted-by.ts";
import { areaAccount } from "./area-account.ts";
import { AreaTracer, together } from "./area-tracer.ts";
import { CellTracer } from "./cell-tracer.ts";
import { openRun } from "./open-run.ts";
import { type Asked, findAsked } from "./places-asked.ts";
import { pointAccount } from "./point-account.ts";
import { remake, spanText } from "./remade-run.ts";
import type { Explanation } from "./schema.ts";

export interface ExplainOptions {
  readonly asked: Asked;
  /** Where the plan lies, if not where the run found it. */
  readonly plan: string | undefined;
  /** Undefined is the whole window; widened to whole steps. */
  readonly from: number | undefined;
  readonly to: number | undefined;
}

/**
 * How figures of a finished run came to be: the run is made again from the files of its manifest, by the code that
 * made it, and what it tells on the way about the places asked for is written down.
 *
 * @throws InputError (kind "usage") as `openRun` and `findAsked`
 */
export async function explainRun(
  folder: string,
  options: ExplainOptions,
  terminal: Terminal,
): Promise<Explanation> {
  const opened = await openRun(folder, options.plan, terminal, (count, noun) =>
    progressBar(terminal, count, noun),
  );
  const { run, done } = opened;
  const { points, areas } = findAsked(run, options.asked);
  const span = spanOf(run, options);
  const cells = [...new Set(points.map(({ cell }) => cell))];
  const cellTracer = new CellTracer(run.grid, run.map, cells);
  const areaTracers = areas.map(({ catchment }) => new AreaTracer(catchment.cells));
  const trace = together([...(cells.length > 0 ? [cellTracer] : []), ...areaTracers]);
  const stored = await readTotals(opened.totalsFile, [
    "radar_total",
    "adjusted_total",
    "radar_depth",
    "adjusted_depth",
  ]);
  const scratch = mkdtempSync(path.join(tmpdir(), "rainreckon-explain-"));
  const clear = () => rmSync(scratch, { recursive: true, force: true });
  // An interrupted account must not leave the results of its units behind.
  process.once("exit", clear);
  try {
    const remade = await remake(
      opened,
      span,
      trace,
      scratch,
      stored,
      terminal,
      cellsOf(
        cells,
        areas.map(({ catchment }) => catchment),
      ),
    );
    const { total, comparison } = remade;
    const adjustedBy = new AdjustedBy(run, total, comparison.adjustment, (cell) => rangeAt(run, total, cell));
    return {
      format: "rainreckon-explain-1",
      run: {
        folder,
        title: done.manifest.title,
        status: done.manifest.status,
        version: done.manifest.version,
        runDigest: done.manifest.runDigest,
      },
      window: spanText(run.window),
      span: spanText(span),
      remarks: [...opened.remarks],
      points: points.map((point) =>
        pointAccount(point, cellTracer.accountOf(cells.indexOf(point.cell)), remade, adjustedBy),
      ),
      catchments: areas.map((area, k) => areaAccount(area, areaTracers[k] as AreaTracer, remade, adjustedBy)),
    };
  } finally {
    process.off("exit", clear);
    clear();
  }
}

function cellsOf(
  cells: readonly number[],
  catchments: readonly PreparedRun["catchments"][number][],
): number[] {
  return [...new Set([...cells, ...catchments.flatMap((catchment) => [...catchment.cells.cells])])];
}

/** Whole steps that hold the span asked for. */
function spanOf({ window, steps }: PreparedRun, { from, to }: ExplainOptions): Interval {
  const asked = { startEpochMs: from ?? window.startEpochMs, endEpochMs: to ?? window.endEpochMs };
  const inside = steps.filter(
    ({ startEpochMs, endEpochMs }) => endEpochMs > asked.startEpochMs && startEpochMs < asked.endEpochMs,
  );
  const [first, last] = [inside[0], inside[inside.length - 1]];
  if (first === undefined || last === undefined || asked.startEpochMs >= asked.endEpochMs) {
    throw new InputError(
      "this span lies outside the window of the run, or has no length",
      `--from ${isoUtc(asked.startEpochMs)} --to ${isoUtc(asked.endEpochMs)}`,
      `the window is ${isoUtc(window.startEpochMs)} to ${isoUtc(window.endEpochMs)}`,
      { kind: "usage" },
    );
  }
  return { startEpochMs: first.startEpochMs, endEpochMs: last.endEpochMs };
}
