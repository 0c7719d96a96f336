/** The file is no ZIP, or not whole. */
export class BrokenZip extends Error {}

export interface ZipEntry {
  path: string;
  sizeBytes: number;
  /** Its bytes, unpacked. */
  stream(): ReadableStream<Uint8Array>;
}

const END = 0x06054b50;
const CENTRAL = 0x02014b50;
const LOCAL = 0x04034b50;
/** The end record with the longest comment that there can be. */
const END_SPAN = 22 + 65_535;

const viewOf = async (blob: Blob, from: number, to: number) =>
  new DataView(await blob.slice(from, to).arrayBuffer());

/**
 * The entries of a ZIP as its end lists them, without reading the rest. Stored and deflated ones; nothing above 4 GB.
 *
 * @throws BrokenZip where the end is missing: a file that broke off has none.
 */
export async function readZip(blob: Blob): Promise<ZipEntry[]> {
  const start = Math.max(0, blob.size - END_SPAN);
  const tail = await viewOf(blob, start, blob.size);
  let end = tail.byteLength - 22;
  while (end >= 0 && tail.getUint32(end, true) !== END) end -= 1;
  if (end < 0) throw new BrokenZip("it has no end");
  const count = tail.getUint16(end + 10, true);
  const sizeBytes = tail.getUint32(end + 12, true);
  const from = tail.getUint32(end + 16, true);
  if (from + sizeBytes > start + end)
    throw new BrokenZip("its list of files is not where it should be");
  const list = await viewOf(blob, from, from + sizeBytes);
  const entries: ZipEntry[] = [];
  let at = 0;
  for (let place = 0; place < count; place += 1) {
    if (at + 46 > list.byteLength || list.getUint32(at, true) !== CENTRAL)
      throw new BrokenZip("its list of files is damaged");
    const [method, packed, size, nameBytes, extra, comment, local] = [
      list.getUint16(at + 10, true),
      list.getUint32(at + 20, true),
      list.getUint32(at + 24, true),
      list.getUint16(at + 28, true),
      list.getUint16(at + 30, true),
      list.getUint16(at + 32, true),
      list.getUint32(at + 42, true),
    ];
    const path = new TextDecoder().decode(new Uint8Array(list.buffer, at + 46, nameBytes));
    if (method !== 0 && method !== 8) throw new BrokenZip(`${path} is packed in an unknown way`);
    const head = await viewOf(blob, local, local + 30);
    if (head.byteLength < 30 || head.getUint32(0, true) !== LOCAL)
      throw new BrokenZip(`${path} is not where it should be`);
    const begins = local + 30 + head.getUint16(26, true) + head.getUint16(28, true);
    entries.push({
      path,
      sizeBytes: size,
      stream: () => {
        const bytes = blob.slice(begins, begins + packed).stream() as ReadableStream<
          Uint8Array<ArrayBuffer>
        >;
        return method === 0 ? bytes : bytes.pipeThrough(new DecompressionStream("deflate-raw"));
      },
    });
    at += 46 + nameBytes + extra + comment;
  }
  return entries;
}
