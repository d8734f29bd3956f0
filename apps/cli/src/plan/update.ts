import path from "node:path";
import { type Document, isCollection, type Node, type YAMLMap } from "yaml";
import type { GaugeFinding } from "../survey/findings.ts";
import type { SurveyResult } from "../survey/survey-result.ts";
import { counted } from "../ui/numbers.ts";
import { catchmentsNode, gaugeGroups, gaugeNode, gridsNode, radarNode } from "./compose.ts";
import { globsFor, relativePath } from "./globs.ts";
import { parsePlan, parsePlanDocument } from "./load.ts";
import { resolveFiles } from "./resolve.ts";

/** An existing plan with what is new added to it. */
export interface UpdatedPlan {
  readonly text: string;
  /** What was added, and what was seen and left alone, one sentence each. */
  readonly changes: readonly string[];
  readonly remarks: readonly string[];
}

/**
 * Adds to a plan what a survey found and the plan does not have: radars, scans, gauge files, catchments.
 *
 * What is there stays as it is, comments too; window and grid never move, for every figure stands on them.
 *
 * @param text - the existing plan
 * @param name - what errors call it
 * @param folder - where the plan lies
 * @throws InputError (kind "usage") where the existing plan has faults
 */
export async function updatePlan(
  text: string,
  name: string,
  folder: string,
  result: SurveyResult,
): Promise<UpdatedPlan> {
  const plan = parsePlan(text, name);
  const { document } = parsePlanDocument(text, name);
  const changes: string[] = [];
  const { findings } = result;

  const knownRadars = new Set(plan.radars.map((radar) => radar.id));
  for (const radar of findings.radars.filter(({ id }) => !knownRadars.has(id))) {
    append(document, ["radars"], radarNode(radar, result.radarsInWindow.has(radar.id)));
    changes.push(`radar ${radar.id} added`);
  }

  const matched = new Set(await resolveFiles(plan.scans, folder, () => undefined));
  const scans = findings.radars.flatMap((radar) => radar.files.map((file) => path.resolve(file)));
  const newScans = scans.filter((file) => !matched.has(file));
  if (newScans.length > 0) {
    for (const glob of globsFor(newScans, result.files, folder)) {
      if (plan.scans.includes(glob)) continue;
      append(document, ["scans"], document.createNode(glob));
      changes.push(`scans ${glob} added (${counted(newScans.length, "new file")} in all)`);
    }
  }

  changes.push(...(await addGrids(document, plan.grids, folder, result)));
  changes.push(...(await addGauges(document, plan.gauges, folder, result)));

  if (plan.catchments === undefined) {
    const node = catchmentsNode(result, folder);
    if (node !== undefined) {
      (document.contents as YAMLMap).set(document.createNode("catchments"), node);
      changes.push("catchments added");
    }
  }
  const updated = changes.length === 0 ? text : document.toString({ lineWidth: 0 });
  // What was put together here must be a plan again, before it takes the place of one.
  parsePlan(updated, name);
  return { text: updated, changes, remarks: windowRemarks(plan.window, result) };
}

/** Adds gridded sources of which the plan has no file; it never tells how those of one time go together. */
async function addGrids(
  document: Document,
  entries: readonly { readonly id: string; readonly files: readonly string[] }[],
  folder: string,
  result: SurveyResult,
): Promise<string[]> {
  const changes: string[] = [];
  const known = new Set<string>();
  for (const { files } of entries) {
    for (const file of await resolveFiles(files, folder, () => undefined)) known.add(file);
  }
  for (const source of result.gridSources) {
    const fresh = source.files.filter((file) => !known.has(path.resolve(file)));
    if (fresh.length === 0) continue;
    const at = entries.findIndex(({ id }) => id === source.id);
    if (at < 0) {
      append(document, ["grids"], gridsNode({ ...source, files: fresh }, result, folder));
      changes.push(`grids ${source.id} added`);
      continue;
    }
    for (const glob of globsFor(
      fresh.map((file) => path.resolve(file)),
      result.files,
      folder,
    )) {
      if (entries[at].files.includes(glob)) continue;
      append(document, ["grids", at, "files"], document.createNode(glob));
      changes.push(`files ${glob} added to grids ${source.id}`);
    }
  }
  return changes;
}

async function addGauges(
  document: Document,
  entries: readonly { readonly network: string; readonly files: readonly string[] }[],
  folder: string,
  { findings }: SurveyResult,
): Promise<string[]> {
  const changes: string[] = [];
  const known = new Set<string>();
  for (const entry of entries) {
    for (const file of await resolveFiles(entry.files, folder, () => undefined)) known.add(file);
  }
  for (const group of gaugeGroups(findings.gauges, findings.stations)) {
    const fresh = group.files.filter((gauge: GaugeFinding) => !known.has(path.resolve(gauge.file)));
    if (fresh.length === 0) continue;
    const network = group.files[0]!.network.value;
    const at = entries.findIndex((entry) => entry.network === network);
    if (at < 0) {
      append(document, ["gauges"], gaugeNode({ ...group, files: fresh }, folder));
      changes.push(`gauge network ${network} added`);
      continue;
    }
    for (const gauge of fresh) {
      const file = relativePath(path.resolve(gauge.file), folder);
      append(document, ["gauges", at, "files"], document.createNode(file));
      changes.push(`gauge file ${file} added to network ${network}`);
    }
  }
  return changes;
}

/** Adds to a list, which is made where there is none; a list written as [] becomes one with an item a line. */
function append(document: Document, at: readonly (string | number)[], node: Node): void {
  const list = document.getIn(at);
  if (!isCollection(list)) {
    document.setIn(at, document.createNode([node]));
    return;
  }
  if (list.items.length === 0) list.flow = false;
  document.addIn(at, node);
}

function windowRemarks(
  window: { readonly from: string; readonly to: string },
  { findings }: SurveyResult,
): string[] {
  const seen = findings.window;
  if (seen === null) return [];
  const beyond =
    Date.parse(seen.from) < Date.parse(window.from) || Date.parse(seen.to) > Date.parse(window.to);
  return beyond
    ? [`the files now reach from ${seen.from} to ${seen.to}; the window stays ${window.from} to ${window.to}`]
    : [];
}
