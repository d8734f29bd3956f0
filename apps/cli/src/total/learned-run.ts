import type { LearnedEcho, OverlapDifference } from "@rainreckon/core";
import { type LearnedValue, writeLearned } from "@rainreckon/formats";
import type { ManifestNotice } from "../manifest.ts";
import type { LoadedPlan } from "../plan/load.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import { version } from "../version.ts";
import type { JobEcho, JobRadar } from "./job.ts";
import { learnEchoes } from "./learn.ts";
import type { PreparedRun } from "./prepare.ts";
import { loadSealed, saveSealed } from "./sealed-file.ts";

/** What was learned before the units of work, where any echo is worked on. */
export const LEARNED = "learned.nc";

type WorkedRadar = JobRadar & { readonly echo: JobEcho };

function isWorked(radar: JobRadar): radar is WorkedRadar {
  return radar.echo !== undefined;
}

/** True where the plan has any step from echo to rain taken. */
export function learnsBeforehand({ shape }: PreparedRun): boolean {
  return shape.radars.some(isWorked);
}

/** The run with what its scans teach of its radars in the job of every unit. */
export async function learnBeforehand(run: PreparedRun, log: LeftOutLog): Promise<PreparedRun> {
  const { radars, overlaps } = await learnFor(run.shape.radars, run.loaded, log);
  return { ...run, shape: { ...run.shape, radars }, overlaps };
}

/** What is kept of the learning of a run. */
interface KeptLesson {
  readonly learned: ReadonlyMap<string, LearnedEcho>;
  readonly overlaps: readonly OverlapDifference[];
  readonly notices: readonly ManifestNotice[];
}

/**
 * As {@link learnBeforehand}, but where a run that was broken off has learned already, its lesson is taken, with what
 * was said of it.
 *
 * @param file - of the same job: its folder stands for the digest of plan, inputs and program
 */
export async function learnOnce(run: PreparedRun, log: LeftOutLog, file: string): Promise<PreparedRun> {
  const kept = loadSealed(file) as KeptLesson | undefined;
  if (kept !== undefined) {
    for (const { kind, count, ...notice } of kept.notices) log.add(kind, notice, count);
    return { ...withLearned(run, kept.learned), overlaps: kept.overlaps };
  }
  const before = new Map(log.all.map((notice) => [noticeKey(notice), notice.count]));
  const taught = await learnBeforehand(run, log);
  if (!learnsBeforehand(taught)) return taught;
  const notices = log.all
    .map((notice) => ({ ...notice, count: notice.count - (before.get(noticeKey(notice)) ?? 0) }))
    .filter(({ count }) => count > 0);
  const learned = new Map(
    taught.shape.radars.filter(isWorked).map(({ site, echo }) => [site.id, echo.learned]),
  );
  saveSealed(file, { learned, overlaps: taught.overlaps, notices } satisfies KeptLesson);
  return taught;
}

function noticeKey({ kind, what, where, fix }: ManifestNotice): string {
  return JSON.stringify([kind, what, where, fix]);
}

/** Radars with what their scans teach, and how they compare; one whose echo is not worked on stays as it is. */
export async function learnFor(
  radars: readonly JobRadar[],
  loaded: LoadedPlan,
  log: LeftOutLog,
): Promise<{ readonly radars: readonly JobRadar[]; readonly overlaps: readonly OverlapDifference[] }> {
  const worked = radars.filter(isWorked);
  if (worked.length === 0) return { radars, overlaps: [] };
  const { learned, overlaps } = await learnEchoes(
    worked.map((radar) => ({ radar, ...radar.echo })),
    loaded.plan.grid,
    loaded,
    log,
  );
  const bySite = new Map(worked.map(({ site }, k) => [site.id, learned[k] as LearnedEcho]));
  return { radars: withKnowledge(radars, bySite), overlaps };
}

/** The run with what is known of its radars, by site id. */
export function withLearned(run: PreparedRun, learned: ReadonlyMap<string, LearnedEcho>): PreparedRun {
  return { ...run, shape: { ...run.shape, radars: withKnowledge(run.shape.radars, learned) } };
}

function withKnowledge(radars: readonly JobRadar[], learned: ReadonlyMap<string, LearnedEcho>): JobRadar[] {
  return radars.map((radar): JobRadar => {
    const known = learned.get(radar.site.id);
    return radar.echo === undefined || known === undefined
      ? radar
      : { ...radar, echo: { ...radar.echo, learned: known } };
  });
}

/** Leaves what was learned in a file. */
export async function writeLearnedOf(run: PreparedRun, file: string): Promise<void> {
  const byRadar = Object.fromEntries(
    run.shape.radars
      .filter(isWorked)
      .map(({ site, echo }) => [site.id, echo.learned as unknown as LearnedValue]),
  );
  await writeLearned(file, byRadar, {
    title: "What a run learned of its radars before its first total",
    source: `rainreckon ${version()}`,
    comment:
      "By radar: echo that stays in place, blocked sectors, phase of the system, loss per degree of phase, melting layer and vertical profile. An estimate from the scans of this run; not a survey of the site.",
  });
}
