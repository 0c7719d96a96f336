export type TextEncoding = "utf-8" | "utf-16le" | "utf-16be" | "windows-1252";

/** Share of the file that tells its encoding, where no byte order mark does. */
const SAMPLE_BYTES = 65_536;

function isUtf8(bytes: Uint8Array): boolean {
  try {
    // As a stream: a character cut off at the sample's end is no fault.
    new TextDecoder("utf-8", { fatal: true }).decode(bytes, { stream: true });
    return true;
  } catch {
    return false;
  }
}

/** What a file's first bytes say of its encoding; of the older code pages only the commonest is taken for granted. */
export function sniffEncoding(bytes: Uint8Array): TextEncoding {
  if (bytes[0] === 0xff && bytes[1] === 0xfe) return "utf-16le";
  if (bytes[0] === 0xfe && bytes[1] === 0xff) return "utf-16be";
  const sample = bytes.subarray(0, SAMPLE_BYTES);
  // Without a mark: digits are ASCII, so one byte of each pair is zero.
  const zeros = [0, 0];
  for (let at = sample.indexOf(0); at >= 0; at = sample.indexOf(0, at + 1)) zeros[at % 2]! += 1;
  const most = sample.length / 4;
  if (zeros[1]! > most && zeros[0] === 0) return "utf-16le";
  if (zeros[0]! > most && zeros[1] === 0) return "utf-16be";
  return isUtf8(sample) ? "utf-8" : "windows-1252";
}

/** Bytes that a byte order mark takes. */
export function markLength(bytes: Uint8Array): number {
  if (bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf) return 3;
  const isUtf16 =
    (bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff);
  return isUtf16 ? 2 : 0;
}
