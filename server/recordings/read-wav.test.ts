import { describe, expect, test } from "vitest";
import { openWav } from "./read-wav";
import { RecordingError } from "./recording-error";
import { pieces, wav, wavHeader } from "./test-wav";

async function readAll(bytes: Uint8Array, pieceBytes = 1000) {
  const { format, blocks } = await openWav(pieces(bytes, pieceBytes), bytes.length);
  const channels: number[][] = Array.from({ length: format.channels }, () => []);
  for await (const block of blocks)
    for (const [index, samples] of block.entries()) channels[index]!.push(...samples);
  return { format, channels };
}

async function refusal(bytes: Uint8Array): Promise<RecordingError> {
  try {
    await readAll(bytes);
  } catch (error) {
    if (error instanceof RecordingError) return error;
    throw error;
  }
  throw new Error("it was read");
}

const ramp = Array.from({ length: 3001 }, (_, at) => (at - 1500) / 2048);
const other = ramp.map((value) => -value / 2);

describe("a WAV recording", () => {
  test.each([
    ["int16", 2 ** -15],
    ["int24", 2 ** -23],
    ["int32", 2 ** -24],
    ["float32", 2 ** -24],
    ["float64", 2 ** -24],
  ] as const)("of %s gives both channels as they were", async (sampleFormat, step) => {
    for (const isExtensible of [false, true]) {
      const bytes = wav({ sampleFormat, rateHz: 48_000, isExtensible }, [ramp, other]);
      for (const pieceBytes of [1, 7, 65_536]) {
        const { format, channels } = await readAll(bytes, pieceBytes);
        expect(format).toMatchObject({ sampleFormat, rateHz: 48_000, channels: 2 });
        expect(format.statedFrames).toBe(3001);
        for (const [index, wanted] of [ramp, other].entries())
          expect(
            Math.max(...wanted.map((value, at) => Math.abs(value - channels[index]![at]!))),
          ).toBeLessThanOrEqual(step);
      }
    }
  });

  test("passes over chunks that it does not know, padded to even lengths", async () => {
    const bytes = wav({ sampleFormat: "int16", rateHz: 44_100, chunks: [["note", 33]] }, [ramp]);
    expect((await readAll(bytes)).channels[0]).toHaveLength(3001);
  });

  test("beyond 4 GB has its length in ds64", async () => {
    const bytes = wav({ sampleFormat: "int24", rateHz: 96_000, container: "RF64" }, [ramp]);
    expect((await readAll(bytes)).channels[0]).toHaveLength(3001);
    const header = wavHeader(
      { sampleFormat: "int16", rateHz: 48_000, container: "BW64" },
      2,
      6_000_000_000,
    );
    expect((await openWav(pieces(header, 100))).format.statedFrames).toBe(1_500_000_000);
  });
});

describe("what cannot be used is refused with its reason", () => {
  const plain = { sampleFormat: "int16", rateHz: 48_000 } as const;

  test("not a WAV", async () => {
    expect((await refusal(new TextEncoder().encode("time;level\n1;80"))).code).toBe(
      "recording-not-wav",
    );
    expect((await refusal(new Uint8Array(0))).code).toBe("recording-not-wav");
  });

  test("compressed", async () => {
    const bytes = wav({ ...plain, formatTag: 0x55 }, [ramp]);
    expect(await refusal(bytes)).toMatchObject({
      code: "recording-compressed",
      params: { formatTag: 0x55 },
    });
  });

  test("a rate, a width, a number of channels that there are no filters for", async () => {
    expect(await refusal(wav({ ...plain, rateHz: 22_050 }, [ramp]))).toMatchObject({
      code: "recording-rate-unsupported",
      params: { rateHz: 22_050 },
    });
    expect(await refusal(wav({ ...plain, bits: 8 }, [ramp]))).toMatchObject({
      code: "recording-format-unsupported",
      params: { bits: 8 },
    });
    expect(await refusal(wav(plain, [ramp, ramp, ramp]))).toMatchObject({
      code: "recording-channels-unsupported",
      params: { channels: 3 },
    });
  });

  test("empty", async () => {
    expect((await refusal(wav(plain, [[]]))).code).toBe("recording-empty");
    expect((await refusal(wavHeader(plain, 1, 96_000))).code).toBe("recording-empty");
  });

  test("longer in its header than in fact", async () => {
    const seconds = new Array<number>(48_000).fill(0.1);
    const bytes = wav(plain, [seconds]);
    expect(await refusal(bytes.subarray(0, bytes.length - 36_000))).toMatchObject({
      code: "recording-truncated",
      params: { missingS: 0.375, statedS: 1, foundS: 0.625 },
    });
  });

  test("of no stated length", async () => {
    const bytes = wav({ ...plain, dataBytes: 0xffff_ffff }, [ramp]);
    expect((await refusal(bytes)).code).toBe("recording-length-unstated");
  });

  test("shorter in its header than in fact: all that is there is given out, and it is asked about", async () => {
    const seconds = new Array<number>(2 * 48_000).fill(0.1);
    const bytes = wav({ ...plain, dataBytes: 48_000 }, [seconds]);
    expect(await refusal(bytes)).toMatchObject({
      code: "recording-longer",
      params: { statedS: 0.5, foundS: 2 },
    });
    const given: number[] = [];
    const { blocks } = await openWav(pieces(bytes, 777), bytes.length);
    await expect(async () => {
      for await (const [block] of blocks) given.push(...block!);
    }).rejects.toThrow("recording-longer");
    expect(given).toHaveLength(96_000);
  });

  test("of the length nought with sound behind it is of no stated length", async () => {
    const seconds = new Array<number>(48_000).fill(0.1);
    expect(await refusal(wav({ ...plain, dataBytes: 0 }, [seconds]))).toMatchObject({
      code: "recording-length-unstated",
      params: { foundS: 1 },
    });
  });

  test("other chunks and padding behind the data are no sound", async () => {
    const seconds = new Array<number>(24_000).fill(0.1);
    const bytes = wav({ ...plain, sampleFormat: "int24" }, [seconds.slice(1)]);
    const note = new Uint8Array(8 + 20_000);
    note.set(new TextEncoder().encode("LIST"));
    new DataView(note.buffer).setUint32(4, 20_000, true);
    // The data are of an odd length, and padded by a byte.
    for (const behind of [Uint8Array.of(0, ...note), note, new Uint8Array(512)])
      expect((await readAll(Uint8Array.of(...bytes, ...behind))).channels[0]).toHaveLength(23_999);
    const empty = wav({ ...plain, dataBytes: 0 }, [[]]);
    expect((await refusal(Uint8Array.of(...empty, ...note))).code).toBe("recording-empty");
  });

  test("damaged", async () => {
    const noFormat = wavHeader(plain, 1, 100);
    noFormat.set(new TextEncoder().encode("fmtx"), 12);
    expect((await refusal(noFormat)).code).toBe("recording-header-damaged");
    const notNumbers = wav({ ...plain, sampleFormat: "float32" }, [[0, Number.NaN, 0]]);
    expect((await refusal(notNumbers)).code).toBe("recording-not-numbers");
    // Half a header, and a piece of a length that a format never has.
    expect((await refusal(wavHeader(plain, 1, 100).subarray(0, 30))).code).toBe(
      "recording-header-damaged",
    );
  });
});
