import { InputError } from "@rainreckon/core";
import { displayText } from "./display-text.ts";
import { readWhole } from "./whole-file.ts";

/*
 * The attribute table of a Shapefile: dBASE III+ table files, as the ESRI white paper of July 1998 refers to
 * them. Layout from memory of the published description: 32 bytes of header, 32 bytes for each field up to
 * a carriage return, then rows of fixed width, each with a mark of deletion before it.
 */

const MAX_DBF_BYTES = 1024 ** 3;
const HEADER_BYTES = 32;
const FIELD_BYTES = 32;
const END_OF_FIELDS = 0x0d;
const DELETED = 0x2a;

export interface DbfTable {
  readonly path: string;
  /** Each row's cells by field, as text without padding; undefined where blank. A deleted row holds none. */
  readonly rows: readonly (Readonly<Record<string, string | undefined>> | "deleted")[];
}

interface Field {
  readonly name: string;
  readonly from: number;
  readonly length: number;
}

/**
 * Reads a .dbf as text. Numbers stay as they are written, so that an id of many digits keeps all of them.
 *
 * @param codePage - what the .cpg says; else the mark in the header counts, else windows-1252
 * @throws InputError where it is cut short, or its header contradicts itself
 */
export async function readDbf(path: string, codePage: string | undefined): Promise<DbfTable> {
  const bytes = await readWhole(path, MAX_DBF_BYTES);
  const refuse = (what: string): never => {
    throw new InputError(what, path, "fetch all files of the Shapefile again");
  };
  if (bytes.length < HEADER_BYTES + 1) return refuse("the table ends within its header");
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const rowCount = view.getUint32(4, true);
  const headerBytes = view.getUint16(8, true);
  const rowBytes = view.getUint16(10, true);
  const decoder = decoderOf(codePage, bytes[29], path);
  const fields = fieldsOf(bytes, headerBytes, decoder, refuse);
  const width = fields.reduce((sum, { length }) => sum + length, 1);
  if (width !== rowBytes) refuse(`its fields are ${width} bytes wide, its rows ${rowBytes}`);
  const end = headerBytes + rowCount * rowBytes;
  // One byte may follow: the mark of the end of the file.
  if (bytes.length < end || bytes.length > end + 1) {
    refuse(`${rowCount} rows of ${rowBytes} bytes do not fit its ${bytes.length} bytes`);
  }
  const rows: DbfTable["rows"][number][] = [];
  for (let row = 0; row < rowCount; row++) {
    const at = headerBytes + row * rowBytes;
    if (bytes[at] === DELETED) {
      rows.push("deleted");
      continue;
    }
    const cells: Record<string, string | undefined> = Object.create(null);
    for (const { name, from, length } of fields) {
      const text = decoder
        .decode(bytes.subarray(at + from, at + from + length))
        .replace(/[\0 ]+$/, "")
        .trimStart();
      // Asterisks stand for a number that does not fit its field.
      cells[name] = text === "" || /^\*+$/.test(text) ? undefined : text;
    }
    rows.push(cells);
  }
  return { path, rows };
}

function fieldsOf(
  bytes: Uint8Array,
  headerBytes: number,
  decoder: InstanceType<typeof TextDecoder>,
  refuse: (what: string) => never,
): Field[] {
  if (headerBytes > bytes.length || headerBytes < HEADER_BYTES + 1)
    refuse("its header does not fit the file");
  const fields: Field[] = [];
  const names = new Set<string>();
  let from = 1;
  for (let at = HEADER_BYTES; bytes[at] !== END_OF_FIELDS; at += FIELD_BYTES) {
    if (at + FIELD_BYTES >= headerBytes) refuse("the list of its fields does not end");
    const raw = bytes.subarray(at, at + 11);
    const nul = raw.indexOf(0);
    const name = decoder.decode(nul < 0 ? raw : raw.subarray(0, nul)).trim();
    const length = bytes[at + 16];
    if (name === "" || length === 0) refuse(`its field ${fields.length + 1} has no name or no width`);
    if (names.has(name)) refuse(`two of its fields are called "${displayText(name, 40)}"`);
    names.add(name);
    fields.push({ name, from, length });
    from += length;
  }
  return fields;
}

/** Language drivers of dBASE whose code page is that of a WHATWG encoding; the others are not guessed at. */
const ENCODING_OF_DRIVER: Readonly<Record<number, string>> = { 3: "windows-1252", 87: "windows-1252" };

function decoderOf(
  codePage: string | undefined,
  driver: number,
  path: string,
): InstanceType<typeof TextDecoder> {
  if (codePage === undefined) return new TextDecoder(ENCODING_OF_DRIVER[driver] ?? "windows-1252");
  const plain = codePage
    .toLowerCase()
    .replace(/^(ansi|cp|ibm)?[ _]?(125\d)$/, "windows-$2")
    .replace(/^8859_?(\d+)$/, "iso-8859-$1")
    .replace(/^88591(\d?)$/, "iso-8859-1$1");
  try {
    return new TextDecoder(plain);
  } catch {
    throw new InputError(
      `the encoding "${displayText(codePage, 40)}" of its .cpg is not known`,
      path,
      "write UTF-8 into the .cpg and save the table likewise",
    );
  }
}
