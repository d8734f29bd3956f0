import { execFileSync } from "node:child_process";
import { mkdirSync, mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import path from "node:path";
import { gunzipSync } from "node:zlib";
import { afterAll, expect, test } from "vitest";
import { type ArchiveEntry, writeTarGz } from "./tar.ts";

const folder = mkdtempSync(path.join(tmpdir(), "rainreckon-tar-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
const TIME = Date.UTC(2021, 4, 20, 12, 0, 7);

// A name of each length about the limit, one far beyond it, and names beyond ASCII; sizes about a block.
const long = (length: number) => `deep/${"x".repeat(length - 5)}`;
const entries: ArchiveEntry[] = [
  { name: "empty.txt", text: "" },
  { name: "run/one block.txt", text: "b".repeat(512) },
  { name: "run/more.txt", text: "ü".repeat(300) },
  { name: "gauges/Zürich – Süd.csv", text: "1,2\n" },
  { name: long(100), text: "100" },
  { name: long(101), text: "101" },
  { name: `${"folder/".repeat(30)}end.txt`, text: "far" },
];

test("the tar of the system unpacks every file, byte by byte, with its time", async () => {
  const file = path.join(folder, "all.tar.gz");
  const source = path.join(folder, "source.bin");
  writeFileSync(source, Buffer.alloc(200_000, 7));
  await writeTarGz(file, [...entries, { name: "from/path.bin", path: source }], TIME);
  const out = path.join(folder, "out");
  mkdirSync(out);
  execFileSync("tar", ["xzf", file, "-C", out]);
  for (const entry of entries)
    expect(readFileSync(path.join(out, entry.name), "utf8")).toBe("text" in entry && entry.text);
  expect(readFileSync(path.join(out, "from/path.bin")).equals(readFileSync(source))).toBe(true);
  expect(statSync(path.join(out, "empty.txt")).mtimeMs).toBe(TIME);
});

test("the same entries are the same bytes; the archive ends with two empty blocks", async () => {
  const [a, b] = ["a", "b"].map((name) => path.join(folder, `${name}.tar.gz`));
  await writeTarGz(a, entries, TIME);
  await writeTarGz(b, entries, TIME);
  expect(readFileSync(a).equals(readFileSync(b))).toBe(true);
  const plain = gunzipSync(readFileSync(a));
  expect(plain.length % 512).toBe(0);
  expect(plain.subarray(-1024).every((byte) => byte === 0)).toBe(true);
});

test.each(["../out.txt", "/abs.txt", "a//b", "a/./b", ""])("%s is no name in an archive", async (name) => {
  await expect(writeTarGz(path.join(folder, "x.tar.gz"), [{ name, text: "" }], 0)).rejects.toThrow(
    RangeError,
  );
});

test("a name twice is refused, a place that cannot be written is told", async () => {
  const twice = [
    { name: "a", text: "" },
    { name: "a", text: "" },
  ];
  await expect(writeTarGz(path.join(folder, "x.tar.gz"), twice, 0)).rejects.toThrow(RangeError);
  await expect(writeTarGz(path.join(folder, "none/x.tar.gz"), [], 0)).rejects.toMatchObject({
    name: "InputError",
    kind: "usage",
  });
});
