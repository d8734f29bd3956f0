import { createReadStream } from "node:fs";
import { open } from "node:fs/promises";
import { InputError } from "@rainreckon/core";
import Papa from "papaparse";
import { displayText } from "./display-text.ts";

/** Largest table that is opened, bytes. */
const MAX_TABLE_BYTES = 4 * 1024 ** 3;
/** As much of each end of a file as is looked at to recognise it. */
const HEAD_BYTES = 64 * 1024;
const DELIMITERS = [",", ";", "\t", "|"] as const;

/** Both ends of a text file: whole lines only, the head with the first line. */
export interface TextEnds {
  readonly headLines: string;
  /** The last lines; empty where the head already holds the whole file. */
  readonly tailLines: string;
  readonly byteLength: number;
}

/**
 * Reads the first and last 64 KiB of a text file.
 *
 * @throws InputError where it cannot be opened, is empty, is not text or is not UTF-8
 */
export async function readTextEnds(path: string): Promise<TextEnds> {
  const file = await openFile(path);
  try {
    const { size } = await file.stat();
    if (size > MAX_TABLE_BYTES) {
      throw new InputError(`${size} bytes are too many for one table`, path, "split the file by time");
    }
    const head = await readAt(file, 0, Math.min(size, HEAD_BYTES));
    const tailFrom = Math.max(HEAD_BYTES, size - HEAD_BYTES);
    const tail = size > HEAD_BYTES ? await readAt(file, tailFrom, size - tailFrom) : new Uint8Array(0);
    refuseOtherThanUtf8(head, path);
    const headText = new TextDecoder("utf-8").decode(head);
    const tailText = new TextDecoder("utf-8").decode(tail);
    if (tail.length === 0) return { headLines: headText, tailLines: "", byteLength: size };
    return {
      headLines: headText.slice(0, headText.lastIndexOf("\n") + 1),
      tailLines: tailText.slice(tailText.indexOf("\n") + 1),
      byteLength: size,
    };
  } finally {
    await file.close();
  }
}

/**
 * The first 64 KiB of any file as UTF-8 text, whatever they are.
 *
 * @throws InputError where it cannot be opened
 */
export async function readHeadText(path: string): Promise<string> {
  const file = await openFile(path);
  try {
    return new TextDecoder("utf-8").decode(await readAt(file, 0, HEAD_BYTES));
  } finally {
    await file.close();
  }
}

async function openFile(path: string): ReturnType<typeof open> {
  try {
    return await open(path, "r");
  } catch (cause) {
    throw new InputError("the file cannot be opened", path, "check that it is there and may be read", {
      cause,
    });
  }
}

async function readAt(
  file: Awaited<ReturnType<typeof open>>,
  position: number,
  length: number,
): Promise<Uint8Array> {
  const buffer = new Uint8Array(length);
  let filled = 0;
  while (filled < length) {
    const { bytesRead } = await file.read(buffer, filled, length - filled, position + filled);
    if (bytesRead === 0) break;
    filled += bytesRead;
  }
  return buffer.subarray(0, filled);
}

function refuseOtherThanUtf8(head: Uint8Array, path: string): void {
  if (head.length === 0) throw new InputError("the file is empty", path, "leave it out or fetch it again");
  const utf16 = (head[0] === 0xff && head[1] === 0xfe) || (head[0] === 0xfe && head[1] === 0xff);
  if (utf16) throw new InputError("the text is UTF-16", path, "save it as UTF-8");
  if (head.includes(0)) throw new InputError("this is not a text file", path, "give a CSV file");
}

/**
 * The character that parts the cells: the one that stands in the header and equally often in most of
 * the lines below.
 *
 * @returns undefined where none does
 */
export function guessDelimiter(headLines: string): string | undefined {
  const lines = headLines
    .split("\n", 50)
    .map((line) => line.replace(/"[^"]*"/g, ""))
    .filter((line) => line.trim() !== "");
  let best: string | undefined;
  let bestScore = 0;
  for (const delimiter of DELIMITERS) {
    const counts = lines.map((line) => line.split(delimiter).length - 1);
    if (counts[0] === 0) continue;
    const score = counts.filter((count) => count === counts[0]).length / counts.length + counts[0] * 1e-6;
    if (score > bestScore) {
      best = delimiter;
      bestScore = score;
    }
  }
  return best;
}

/** Cells of some lines of text, trimmed; lines without any text left out. */
export function parseLines(text: string, delimiter: string): string[][] {
  const { data } = Papa.parse<string[]>(text, { delimiter, newline: "\n" });
  return data.filter((cells) => !isBlank(cells)).map((cells) => cells.map(trimCell));
}

/** What `streamRows` hands over. Cells are trimmed; blank lines are left out; lines count from 1. */
export interface RowHandler {
  header(cells: readonly string[], line: number): void;
  row(cells: readonly string[], line: number): void;
  /** A quotation mark that is never closed, or closed in the middle of a cell: it swallows whole lines. */
  quoteFault(line: number, lineCount: number): void;
}

/**
 * Reads a delimited file row by row, never the whole of it at once.
 *
 * The first line with text in it is the header. BOM, CRLF, LF and quoted cells (RFC 4180) are understood.
 *
 * @throws InputError where the file is empty or not UTF-8 text, or where no delimiter can be found;
 * whatever `handler` throws
 */
export async function streamRows(path: string, handler: RowHandler): Promise<void> {
  const { headLines } = await readTextEnds(path);
  const delimiter = guessDelimiter(headLines);
  if (delimiter === undefined) {
    throw new InputError(
      "the header holds only one column",
      path,
      "part the cells by comma, semicolon, tab or |",
    );
  }
  let line = 1;
  let headerSeen = false;
  await new Promise<void>((resolve, reject) => {
    const stream = createReadStream(path, { encoding: "utf8", highWaterMark: 1 << 20 });
    const fail = (cause: unknown) => {
      stream.destroy();
      reject(cause);
    };
    Papa.parse<string[]>(stream, {
      delimiter,
      newline: "\n",
      chunk: ({ data, errors }) => {
        try {
          const faulty = new Set(errors.filter((fault) => fault.type === "Quotes").map((fault) => fault.row));
          for (let index = 0; index < data.length; index++) {
            const cells = data[index];
            const startLine = line;
            let lineCount = 1;
            line += 1;
            for (let at = 0; at < cells.length; at++) {
              const cell = cells[at];
              line += lineEndsIn(cell);
              cells[at] = trimCell(cell);
              // Not the line end before the end of the file, which an open quotation mark holds too.
              lineCount += lineEndsIn(cells[at]);
            }
            if (faulty.has(index)) handler.quoteFault(startLine, lineCount);
            else if (isBlank(cells)) continue;
            else if (headerSeen) handler.row(cells, startLine);
            else {
              headerSeen = true;
              handler.header(cells, startLine);
            }
          }
        } catch (cause) {
          fail(cause);
        }
      },
      complete: () => resolve(),
      error: fail,
    });
  });
}

function lineEndsIn(cell: string): number {
  let count = 0;
  for (let at = cell.indexOf("\n"); at >= 0; at = cell.indexOf("\n", at + 1)) count++;
  return count;
}

/** String.trim takes a byte order mark for white space, so the one at the head of a file goes too. */
function trimCell(cell: string): string {
  return cell.trim();
}

function isBlank(cells: readonly string[]): boolean {
  for (const cell of cells) if (cell.trim() !== "") return false;
  return true;
}

/**
 * Where a column stands.
 *
 * @throws InputError that lists the columns there are
 */
export function columnIndex(header: readonly string[], name: string, path: string): number {
  const index = header.indexOf(name);
  if (index >= 0) return index;
  const near = header.find((column) => column.toLowerCase() === name.toLowerCase());
  const there = header.slice(0, 12).map((column) => `"${displayText(column, 60)}"`);
  const more = header.length > 12 ? ` and ${header.length - 12} more` : "";
  throw new InputError(
    `there is no column "${name}"`,
    path,
    near === undefined
      ? `name one of ${there.join(", ")}${more}`
      : `name it as the file does, "${displayText(near, 60)}"`,
  );
}
