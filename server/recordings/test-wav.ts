import type { SampleFormat } from "./read-wav";

export interface TestWav {
  readonly sampleFormat: SampleFormat;
  readonly rateHz: number;
  readonly isExtensible?: boolean;
  readonly container?: "RIFF" | "RF64" | "BW64";
  /** Unknown chunks before the data: name and length. */
  readonly chunks?: readonly (readonly [string, number])[];
  /** Said instead of the truth. */
  readonly formatTag?: number;
  readonly bits?: number;
  readonly dataBytes?: number;
}

const widthOf = (sampleFormat: SampleFormat) => Number(sampleFormat.replace(/\D+/, "")) / 8;

/** The bytes of a header for so many channels and bytes of data. */
export function wavHeader(
  options: TestWav,
  channels: number,
  dataBytes: number,
): Uint8Array<ArrayBuffer> {
  const { sampleFormat, rateHz, isExtensible = false, container = "RIFF", chunks = [] } = options;
  const bytes: number[] = [];
  const text = (value: string) => bytes.push(...new TextEncoder().encode(value));
  const number = (value: number, width: number) => {
    for (let index = 0; index < width; index++) bytes.push(Math.floor(value / 256 ** index) % 256);
  };
  const width = widthOf(sampleFormat);
  const bits = options.bits ?? 8 * width;
  const tag = options.formatTag ?? (sampleFormat.startsWith("int") ? 1 : 3);
  const isLong = container !== "RIFF";
  text(container);
  number(isLong ? 0xffff_ffff : Math.min(dataBytes + 36, 0xffff_ffff), 4);
  text("WAVE");
  if (isLong) {
    text("ds64");
    number(28, 4);
    number(dataBytes + 72, 8);
    number(dataBytes, 8);
    number(Math.floor(dataBytes / (channels * width)), 8);
    number(0, 4);
  }
  text("fmt ");
  number(isExtensible ? 40 : 16, 4);
  number(isExtensible ? 0xfffe : tag, 2);
  number(channels, 2);
  number(rateHz, 4);
  number(rateHz * channels * width, 4);
  number(channels * width, 2);
  number(bits, 2);
  if (isExtensible) {
    number(22, 2);
    number(bits, 2);
    number(0, 4);
    number(tag, 2);
    bytes.push(0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xaa, 0, 0x38, 0x9b, 0x71);
  }
  for (const [name, length] of chunks) {
    text(name);
    number(length, 4);
    for (let index = 0; index < length + (length % 2); index++) bytes.push(index % 251);
  }
  text("data");
  number(isLong ? 0xffff_ffff : (options.dataBytes ?? dataBytes), 4);
  return Uint8Array.from(bytes);
}

/** A recording from its samples by channel, ±1. */
export function wav(
  options: TestWav,
  channels: readonly ArrayLike<number>[],
): Uint8Array<ArrayBuffer> {
  const { sampleFormat } = options;
  const width = widthOf(sampleFormat);
  const frames = channels[0]!.length;
  const header = wavHeader(options, channels.length, frames * channels.length * width);
  const bytes = new Uint8Array(header.length + frames * channels.length * width);
  bytes.set(header);
  const view = new DataView(bytes.buffer);
  let at = header.length;
  for (let frame = 0; frame < frames; frame++)
    for (const channel of channels) {
      const value = channel[frame]!;
      if (sampleFormat === "float32") view.setFloat32(at, value, true);
      else if (sampleFormat === "float64") view.setFloat64(at, value, true);
      else {
        const scale = 2 ** (8 * width - 1);
        const whole = Math.max(-scale, Math.min(scale - 1, Math.round(value * scale)));
        for (let index = 0; index < width; index++)
          bytes[at + index] = Math.floor(whole / 256 ** index) & 255;
      }
      at += width;
    }
  return bytes;
}

/** A stream that comes in pieces of a length. */
export async function* pieces(bytes: Uint8Array, length: number): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < bytes.length; at += length) yield bytes.subarray(at, at + length);
}
