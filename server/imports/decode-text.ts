import { AppError } from "../lib/errors";

/** What a file is that is no CSV, as far as its first bytes tell. */
type Found = "empty" | "spreadsheet" | "pdf" | "picture" | "binary" | "other-encoding";

const notCsv = (found: Found) => new AppError("not-csv", 415, { found });

const SIGNATURES: readonly (readonly [readonly number[], Found])[] = [
  [[0x50, 0x4b, 0x03, 0x04], "spreadsheet"],
  [[0xd0, 0xcf, 0x11, 0xe0], "spreadsheet"],
  [[0x25, 0x50, 0x44, 0x46], "pdf"],
  [[0x89, 0x50, 0x4e, 0x47], "picture"],
  [[0xff, 0xd8, 0xff], "picture"],
  [[0x47, 0x49, 0x46, 0x38], "picture"],
];

const signedAs = (bytes: Buffer): Found | undefined =>
  SIGNATURES.find(([signature]) => signature.every((byte, at) => bytes[at] === byte))?.[1];

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
  const signed = signedAs(bytes);
  if (signed) throw notCsv(signed);
  const encoding = encodingOf(bytes);
  let text: string;
  try {
    text = new TextDecoder(encoding, { fatal: true }).decode(bytes);
  } catch {
    throw notCsv("other-encoding");
  }
  // biome-ignore lint/suspicious/noControlCharactersInRegex: these are what tells a binary file
  if (/[\u0000-\u0008\u000e-\u001f]/.test(text)) throw notCsv("binary");
  if (text.trim() === "") throw notCsv("empty");
  return text;
}
