import { InputError } from "@rainreckon/core";
import { MAX_CELLS } from "./gridded-file.ts";

const ENTRY_BYTES = 12;
const TYPE_BYTES: readonly number[] = [0, 1, 1, 2, 4, 8, 1, 1, 2, 4, 8, 4, 8];
const TAGS = { width: 256, height: 257, bits: 258, samples: 277, tileWidth: 322, tileHeight: 323 } as const;
const LARGEST_TILE = 65_536;

/**
 * Holds the sizes that a TIFF claims against its length, before a library takes them at their word and makes room.
 *
 * @throws InputError where a list is longer than the file, or picture or tiles are absurdly large
 * @see TIFF 6.0 (Aldus, 1992), section 2, "TIFF Structure"
 */
export function checkTiff(bytes: Buffer, path: string): void {
  const damaged = (what: string) => new InputError(`the file is damaged: ${what}`, path, "fetch it again");
  const isLittle = bytes[0] === 0x49;
  if (bytes.length < 16) throw damaged("its head cannot be read");
  const u16 = (at: number) => (isLittle ? bytes.readUInt16LE(at) : bytes.readUInt16BE(at));
  const u32 = (at: number) => (isLittle ? bytes.readUInt32LE(at) : bytes.readUInt32BE(at));
  if (u16(2) === 43) {
    throw new InputError("a BigTIFF, which is not read", path, "store it as a plain GeoTIFF");
  }
  const directory = u32(4);
  if (directory + 2 > bytes.length) throw damaged("its directory lies beyond its end");
  const count = u16(directory);
  if (directory + 2 + count * ENTRY_BYTES > bytes.length) throw damaged("its directory is cut short");
  const values = new Map<number, number>();
  for (let entry = 0; entry < count; entry++) {
    const at = directory + 2 + entry * ENTRY_BYTES;
    const [tag, type, length] = [u16(at), u16(at + 2), u32(at + 4)];
    const size = length * (TYPE_BYTES[type] ?? 0);
    if (TYPE_BYTES[type] === undefined || type === 0) throw damaged("a field has a type that is none");
    if (size > 4 && u32(at + 8) + size > bytes.length) throw damaged("a field lies beyond its end");
    values.set(tag, type === 3 ? u16(at + 8) : u32(at + 8));
  }
  const of = (name: keyof typeof TAGS, otherwise: number) => values.get(TAGS[name]) ?? otherwise;
  const cells = of("width", 0) * of("height", 0);
  const tile = of("tileWidth", 1) * of("tileHeight", 1);
  const isLarge = !(cells >= 1 && cells * of("samples", 1) <= MAX_CELLS) || of("samples", 1) > 64;
  if (isLarge || of("tileWidth", 1) > LARGEST_TILE || tile > MAX_CELLS) {
    throw new InputError(
      `the picture claims ${of("width", 0)} by ${of("height", 0)} cells in tiles of ${of("tileWidth", 1)} by ${of("tileHeight", 1)}`,
      path,
      `1 to ${MAX_CELLS} are read: cut it to the area of interest`,
    );
  }
}
