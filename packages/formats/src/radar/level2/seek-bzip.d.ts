declare module "seek-bzip" {
  const bzip2: {
    /** Decodes a whole stream, checking its sums; throws TypeError where it is damaged. */
    decode(input: Uint8Array, output: { writeByte(byte: number): void }): unknown;
  };
  export default bzip2;
}
