import type { Plan } from "../plan/schema.ts";
import { planSchema } from "../plan/schema.ts";

/** A setting that is not at its default. */
export interface ChangedSetting {
  readonly path: string;
  readonly value: string;
  readonly defaultValue: string;
}

/** What a plan would be had nobody written any setting: what has no default (title, window, files, grid …) stays. */
function bareOf(plan: Plan): Plan {
  return planSchema.parse({
    title: plan.title,
    window: { from: plan.window.from, to: plan.window.to },
    scans: plan.scans,
    radars: plan.radars.map(({ id, medianRoundMinutes, maxGapMinutes }) => ({
      id,
      medianRoundMinutes,
      maxGapMinutes,
    })),
    grids: plan.grids.map(({ id, files, quantity }) => ({
      id,
      files,
      quantity,
      // Found in the files, and needed by two of three quantities.
      medianStepMinutes: 1,
      maxGapMinutes: 1,
    })),
    grid: plan.grid,
  });
}

/**
 * A plan with all settings at their defaults, over the same window, places, gauges and files. What files and sites are
 * like is no setting: it stays.
 */
export function standardPlan(plan: Plan): Plan {
  const bare = bareOf(plan);
  const { reference, author, status, window, gauges, catchments, assets } = plan;
  const { terrain } = plan.echo.blockage;
  return {
    ...bare,
    reference,
    author,
    status,
    window,
    gauges,
    radars: bare.radars.map((radar, k) => ({ ...plan.radars[k], ...radar })),
    grids: bare.grids.map(({ medianStepMinutes: _, maxGapMinutes: __, ...grids }, k) => ({
      ...plan.grids[k],
      ...grids,
    })),
    echo: {
      ...bare.echo,
      blockage: { ...bare.echo.blockage, ...(terrain === undefined ? {} : { terrain }) },
    },
    ...(catchments === undefined ? {} : { catchments }),
    ...(assets === undefined ? {} : { assets }),
  };
}

/**
 * Settings of a plan that differ from what they would be had nobody written them.
 * Values that have no default (title, window, files, grid …) are not settings in this sense.
 */
export function changedSettings(plan: Plan): ChangedSetting[] {
  const bare = bareOf(plan);
  const changed: ChangedSetting[] = [];
  const walk = (value: unknown, standard: unknown, path: string): void => {
    if (standard === undefined) return;
    if (isRecord(value) && isRecord(standard)) {
      for (const key of Object.keys(standard))
        walk(value[key], standard[key], path === "" ? key : `${path}.${key}`);
      return;
    }
    if (Array.isArray(value) && Array.isArray(standard) && (path === "radars" || path === "grids")) {
      for (const [k, item] of value.entries()) walk(item, standard[k], `${path}[${k}]`);
      return;
    }
    if (JSON.stringify(value) === JSON.stringify(standard)) return;
    if (NEVER_STANDARD.has(path) || /\.(medianStepMinutes|maxGapMinutes)$/.test(path)) return;
    changed.push({ path, value: JSON.stringify(value), defaultValue: JSON.stringify(standard) });
  };
  walk(plan, bare, "");
  return changed;
}

/** Found or given for each run, so that "differs from its default" says nothing. */
const NEVER_STANDARD = new Set(["gauges", "reference", "author", "status", "overrides", "window.zone"]);

function isRecord(value: unknown): value is Record<string, unknown> {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}
