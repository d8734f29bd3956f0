import { expect, test } from "vitest";
import { leftOutLog } from "./left-out.ts";
import type { Terminal } from "./terminal.ts";

function recorder(): { terminal: Terminal; lines: string[] } {
  const lines: string[] = [];
  const terminal: Terminal = {
    json: false,
    quiet: false,
    debug: false,
    live: false,
    result: () => undefined,
    note: (text) => lines.push(text),
    strong: (text) => text,
  };
  return { terminal, lines };
}

test("twenty of a kind are printed, the rest is counted, and all of it is kept", () => {
  const { terminal, lines } = recorder();
  const log = leftOutLog(terminal);
  for (let index = 1; index <= 23; index += 1) {
    log.add("scan left out", { what: "it is cut off", where: `${index}.h5`, fix: "fetch it again" });
  }
  log.add("gauge left out", { what: "no station", where: "gauge 7", fix: "add it" });
  log.finish();
  expect(lines[0]).toBe("1.h5: it is cut off; fetch it again");
  expect(lines).toHaveLength(22);
  expect(lines.at(-1)).toBe("and 3 more: scan left out");
  expect(log.all).toHaveLength(24);
  expect(log.count).toBe(24);
});

test("what is said twice is one notice with its count, and one line", () => {
  const { terminal, lines } = recorder();
  const log = leftOutLog(terminal);
  const notice = { what: "negative depth", where: "gauges.csv", fix: "leave it empty" };
  log.add("reading left out", notice);
  log.add("reading left out", notice, 4);
  expect(lines).toHaveLength(1);
  expect(log.all).toEqual([{ kind: "reading left out", ...notice, count: 5 }]);
  expect(log.count).toBe(5);
});
