import { AppError } from "../lib/errors";

const notCsv = (detail: string) => new AppError("not-csv", 415, { detail });

/** Share of the file that tells its encoding, where no byte order mark does. */
const SAMPLE_BYTES = 4096;

function encodingOf(bytes: Buffer): "utf-8" | "utf-16le" | "utf-16be" {
  if (bytes[0] === 0xff && bytes[1] === 0xfe) return "utf-16le";
  if (bytes[0] === 0xfe && bytes[1] === 0xff) return "utf-16be";
  // Without a mark: the column names are ASCII, so one byte of each pair is zero.
  const sample = bytes.subarray(0, SAMPLE_BYTES);
  const zeros = [0, 0];
  sample.forEach((byte, index) => {
    if (byte === 0) zeros[index % 2]! += 1;
  });
  const most = sample.length / 4;
  if (zeros[1]! > most && zeros[0] === 0) return "utf-16le";
  if (zeros[0]! > most && zeros[1] === 0) return "utf-16be";
  return "utf-8";
}

/**
 * The text of an uploaded file: UTF-8, or UTF-16 in either order, with or without a byte order mark.
 *
 * @throws AppError not-csv, for what is no text: nothing is guessed of older code pages.
 */
export function decodeText(bytes: Buffer): string {
  const encoding = encodingOf(bytes);
  let text: string;
  try {
    text = new TextDecoder(encoding, { fatal: true }).decode(bytes);
  } catch {
    throw notCsv(encoding);
  }
  // biome-ignore lint/suspicious/noControlCharactersInRegex: these are what tells a binary file
  if (/[\u0000-\u0008\u000e-\u001f]/.test(text)) throw notCsv("binary");
  if (text.trim() === "") throw notCsv("empty");
  return text;
}
