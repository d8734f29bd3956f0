import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { NOTHING_LEARNED } from "@rainreckon/core";
import { afterAll, expect, test } from "vitest";
import { leftOutLog } from "../ui/left-out.ts";
import type { JobRadar } from "./job.ts";
import { learnOnce } from "./learned-run.ts";
import type { PreparedRun } from "./prepare.ts";
import { saveSealed } from "./sealed-file.ts";

const folder = mkdtempSync(path.join(tmpdir(), "rainreckon-learned-"));
afterAll(() => rmSync(folder, { recursive: true }));

const silent = {
  json: false,
  quiet: true,
  debug: false,
  live: false,
  result: () => undefined,
  note: () => undefined,
  strong: (text: string) => text,
};
const NOTICE = { what: "no rain in it", where: "radar a", fix: "give more scans" };
const radar = { site: { id: "a" }, echo: { learned: NOTHING_LEARNED } } as unknown as JobRadar;
// Nothing that could be learned from: whoever reads a scan of it fails.
const run = { shape: { radars: [radar] }, overlaps: [] } as unknown as PreparedRun;

test("a run that is taken up again takes its lesson from its folder, with what was said of it", async () => {
  const file = path.join(folder, "learned");
  const learned = { ...NOTHING_LEARNED, roundCount: 48, attenuation: { systemPhaseDeg: 61.5 } };
  const overlaps = [{ oneSiteId: "a", otherSiteId: "b" }];
  saveSealed(file, {
    learned: new Map([["a", learned]]),
    overlaps,
    notices: [{ kind: "doubted", ...NOTICE, count: 2 }],
  });
  const log = leftOutLog(silent);
  const taught = await learnOnce(run, log, file);
  expect(taught.shape.radars[0]?.echo?.learned).toEqual(learned);
  expect(taught.overlaps).toEqual(overlaps);
  expect(log.all).toEqual([{ kind: "doubted", ...NOTICE, count: 2 }]);
});

test("a damaged lesson is learned again", async () => {
  const file = path.join(folder, "damaged");
  writeFileSync(file, "half a lesson");
  await expect(learnOnce(run, leftOutLog(silent), file)).rejects.toThrow(TypeError);
});
