import { canonicalJson, sha256Hex } from "../digest.ts";
import type { OpenedRun } from "../explain/open-run.ts";
import type { LoadedPlan } from "../plan/load.ts";
import { cellAsArea } from "../total/assets.ts";
import { standardPlan } from "../total/changed-settings.ts";
import { bestMm, windowFigure } from "../total/figures.ts";
import { learnBeforehand } from "../total/learned-run.ts";
import { placePoint } from "../total/places.ts";
import { prepareRun } from "../total/prepare.ts";
import { leftOutLog } from "../ui/left-out.ts";
import { progressBar } from "../ui/progress.ts";
import type { Terminal } from "../ui/terminal.ts";
import { madeAgain } from "./remade-series.ts";
import type { PlaceReport } from "./schema.ts";

/** Depth of the window at a place, had every setting of the plan been left at its default; null where not observed. */
export async function defaultFigure(
  opened: OpenedRun,
  place: PlaceReport,
  terminal: Terminal,
): Promise<{ readonly bestMm: number | null; readonly radarMm: number | null }> {
  const { loaded } = opened.run;
  const plan = standardPlan(loaded.plan);
  const standard: LoadedPlan = { ...loaded, plan, digest: sha256Hex(canonicalJson(plan)) };
  // What has to be said of the inputs was said by total.
  const silent = leftOutLog({ ...terminal, note: () => undefined });
  const prepared = await prepareRun(standard, silent, (count, noun) => progressBar(terminal, count, noun));
  const run = await learnBeforehand(prepared, silent);
  const remade = await madeAgain({ ...opened, run }, terminal);
  const catchment = run.catchments.find(({ id }) => place.kind === "catchment" && id === place.id);
  const point = { lonDeg: place.lonDeg ?? 0, latDeg: place.latDeg ?? 0 };
  const { cell } = placePoint(run.grid, run.map, point, "nearest");
  const figure = windowFigure(catchment?.cells ?? cellAsArea(run.grid, cell), { ...remade, run });
  return { bestMm: known(bestMm(figure)), radarMm: known(figure.radarMm) };
}

function known(mm: number): number | null {
  return Number.isNaN(mm) ? null : mm;
}
