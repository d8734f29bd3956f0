import { createReadStream } from "node:fs";
import { open } from "node:fs/promises";
import { Readable } from "node:stream";
import { InputError } from "@rainreckon/core";
import Papa from "papaparse";
import { displayText } from "./display-text.ts";
import { guessEncoding, settleEncoding, type TextEncodingName } from "./text-encoding.ts";

/** Largest table that is opened, bytes. */
const MAX_TABLE_BYTES = 4 * 1024 ** 3;
/** As much of each end of a file as is looked at to recognise it. */
const HEAD_BYTES = 64 * 1024;
const MAX_BYTES_AT_ONCE = 1 << 20;
const DELIMITERS = [",", ";", "\t", "|"] as const;

/** Both ends of a text file: whole lines only, the head with the first line. */
export interface TextEnds {
  readonly headLines: string;
  /** The last lines; empty where the head already holds the whole file. */
  readonly tailLines: string;
  readonly byteLength: number;
  readonly encoding: TextEncodingName;
}

/**
 * Reads the first and last 64 KiB of a text file.
 *
 * @param planned - the encoding, found from the bytes where left out
 * @throws InputError where it cannot be opened, is empty, is not text, or is not in the encoding named
 */
export async function readTextEnds(path: string, planned?: TextEncodingName): Promise<TextEnds> {
  const file = await openFile(path);
  try {
    const { size } = await file.stat();
    if (size > MAX_TABLE_BYTES) {
      throw new InputError(`${size} bytes are too many for one table`, path, "split the file by time");
    }
    const head = await readAt(file, 0, Math.min(size, HEAD_BYTES));
    // An even place, so that pairs of bytes stay pairs.
    const tailFrom = Math.max(HEAD_BYTES, 2 * Math.ceil((size - HEAD_BYTES) / 2));
    const tail = size > HEAD_BYTES ? await readAt(file, tailFrom, size - tailFrom) : new Uint8Array(0);
    if (head.length === 0) throw new InputError("the file is empty", path, "leave it out or fetch it again");
    const encoding = settleEncoding(head, tail, planned, path);
    const headText = new TextDecoder(encoding).decode(head);
    const tailText = new TextDecoder(encoding).decode(tail);
    if (tail.length === 0) return { headLines: headText, tailLines: "", byteLength: size, encoding };
    return {
      headLines: headText.slice(0, headText.lastIndexOf("\n") + 1),
      tailLines: tailText.slice(tailText.indexOf("\n") + 1),
      byteLength: size,
      encoding,
    };
  } finally {
    await file.close();
  }
}

/**
 * The first 64 KiB of any file as text, whatever they are.
 *
 * @throws InputError where it cannot be opened
 */
export async function readHeadText(path: string): Promise<string> {
  const head = await readHeadBytes(path);
  return new TextDecoder(guessEncoding(head, new Uint8Array(0))?.value ?? "utf-8").decode(head);
}

/**
 * The first 64 KiB of any file.
 *
 * @throws InputError where it cannot be opened
 */
export async function readHeadBytes(path: string): Promise<Uint8Array> {
  const file = await openFile(path);
  try {
    const { size } = await file.stat();
    return await readAt(file, 0, Math.min(size, HEAD_BYTES));
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

/** How the text of a table is to be taken apart; what is left out is found from the file. */
export interface TableForm {
  readonly encoding?: TextEncodingName | undefined;
  /** Line that holds the names of the columns, from 1; the first one with text in it where left out. */
  readonly headerLine?: number | undefined;
}

/** What `streamRows` hands over. Cells are trimmed; blank lines are left out; lines count from 1. */
export interface RowHandler {
  /** The lines above the header, where `headerLine` says that there are some. */
  above?(lines: readonly string[]): void;
  header(cells: readonly string[], line: number): void;
  row(cells: readonly string[], line: number): void;
  /** A quotation mark that is never closed, or closed in the middle of a cell: it swallows whole lines. */
  quoteFault(line: number, lineCount: number): void;
  /** A row with a character that the encoding does not have. */
  undecoded(line: number, encoding: TextEncodingName): void;
}

/**
 * Reads a delimited file row by row, never the whole of it at once.
 *
 * BOM, CRLF, LF and quoted cells (RFC 4180) are understood.
 *
 * @throws InputError where the file is empty or no text, where no delimiter can be found, or where the
 * header cannot be decoded; whatever `handler` throws
 */
export async function streamRows(path: string, form: TableForm, handler: RowHandler): Promise<void> {
  const { headLines, encoding, byteLength } = await readTextEnds(path, form.encoding);
  const linesAbove = (form.headerLine ?? 1) - 1;
  const parts = headLines.split("\n", linesAbove + 51);
  if (parts.length <= linesAbove) {
    throw new InputError(`there is no line ${linesAbove + 1}`, path, "check headerLine");
  }
  const delimiter = guessDelimiter(parts.slice(linesAbove).join("\n"));
  if (delimiter === undefined) {
    throw new InputError(
      "the header holds only one column",
      path,
      "part the cells by comma, semicolon, tab or |, and write headerLine where lines stand above the header",
    );
  }
  handler.above?.(parts.slice(0, linesAbove).map((text) => text.trim()));
  const text = new DecodedText(path, byteLength, encoding, linesAbove);
  let line = linesAbove + 1;
  let headerSeen = false;
  await new Promise<void>((resolve, reject) => {
    const stream = Readable.from(text.chunks());
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
            const undecoded = text.sawUndecoded && cells.some((cell) => cell.includes(UNDECODED));
            if (faulty.has(index)) handler.quoteFault(startLine, lineCount);
            else if (isBlank(cells)) continue;
            else if (headerSeen && undecoded) handler.undecoded(startLine, encoding);
            else if (headerSeen) handler.row(cells, startLine);
            else if (undecoded) {
              throw new InputError(
                `the header holds a character that is not ${encoding}`,
                `${path}, line ${startLine}`,
                "name the encoding of the file: encoding: windows-1252, say",
              );
            } else {
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

/** What decoders put in the place of bytes that are no character. */
const UNDECODED = "\ufffd";

/** The text of a file from some line on. */
class DecodedText {
  /** Whether bytes that are no character were met so far. */
  sawUndecoded = false;
  readonly #path: string;
  readonly #bytesAtOnce: number;
  readonly #encoding: TextEncodingName;
  #linesToSkip: number;

  constructor(path: string, byteLength: number, encoding: TextEncodingName, linesToSkip: number) {
    this.#path = path;
    // No larger than the file: a buffer for each of a thousand small files costs more than reading them.
    this.#bytesAtOnce = Math.min(MAX_BYTES_AT_ONCE, Math.max(1024, byteLength));
    this.#encoding = encoding;
    this.#linesToSkip = linesToSkip;
  }

  async *chunks(): AsyncGenerator<string> {
    const decoder = new TextDecoder(this.#encoding);
    for await (const bytes of createReadStream(this.#path, { highWaterMark: this.#bytesAtOnce })) {
      const text = this.#below(decoder.decode(bytes as Uint8Array, { stream: true }));
      if (text !== "") yield text;
    }
    const rest = this.#below(decoder.decode());
    if (rest !== "") yield rest;
  }

  #below(text: string): string {
    let from = 0;
    while (this.#linesToSkip > 0) {
      const end = text.indexOf("\n", from);
      if (end < 0) return "";
      from = end + 1;
      this.#linesToSkip -= 1;
    }
    const below = text.slice(from);
    this.sawUndecoded ||= below.includes(UNDECODED);
    return below;
  }
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
