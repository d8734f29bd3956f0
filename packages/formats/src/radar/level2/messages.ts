/** One message of the radar, without its header. */
export interface Message {
  readonly type: number;
  readonly body: Buffer;
}

/** Channel terminal manager information in front of each message; means nothing in an archive. */
const CTM_BYTES = 12;
const MESSAGE_HEADER_BYTES = 16;
/** Every message but 31 fills one frame of this length. */
const FRAME_BYTES = 2432;
const DIGITAL_RADAR_DATA = 31;

/**
 * The messages of one record.
 *
 * @returns the messages, and whether the record ended within one
 * @see Interface Control Document for the RDA/RPG, 2620002, NOAA Radar Operations Center: table II, message header
 */
export function messagesOf(record: Buffer): {
  readonly messages: readonly Message[];
  readonly cutShort: boolean;
} {
  const messages: Message[] = [];
  let at = 0;
  while (at + CTM_BYTES + MESSAGE_HEADER_BYTES <= record.length) {
    const header = at + CTM_BYTES;
    const type = record.readUInt8(header + 3);
    const bytes = record.readUInt16BE(header) * 2;
    const body = header + MESSAGE_HEADER_BYTES;
    const isLong = type === DIGITAL_RADAR_DATA;
    const next = isLong ? at + CTM_BYTES + Math.max(bytes, MESSAGE_HEADER_BYTES) : at + FRAME_BYTES;
    const end = isLong ? next : Math.min(next, record.length);
    if (end > record.length) return { messages, cutShort: true };
    // Type 0 is a frame that was never filled.
    if (type !== 0 && end > body) messages.push({ type, body: record.subarray(body, end) });
    at = next;
  }
  return { messages, cutShort: false };
}

/** Epoch milliseconds from a modified Julian date (day 1 is 1 January 1970) and milliseconds of the day. */
export function messageEpochMs(day: number, msOfDay: number): number {
  return (day - 1) * 86_400_000 + msOfDay;
}
