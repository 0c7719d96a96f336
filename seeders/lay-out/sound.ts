import { OCTAVE_BANDS } from "../../shared/acoustics/signal";
import { OCTAVE_BANDS_HZ, type OctaveBandValues } from "../../shared/acoustics/types";
import { chance } from "./chance";

const RATE_HZ = 48_000;
/** Of tones whose periods fit into it; then it begins again. */
const LOOP_S = 2;
const TONES_AN_OCTAVE = 24;
const REFERENCE_PA = 20e-6;
const BYTES_A_SAMPLE = 2;

/** A sum of tones with a spectrum, Pa: as many equal ones in each octave as make its level. */
function loopOf(bandsDb: OctaveBandValues, seed: string): Float64Array {
  const loop = new Float64Array(LOOP_S * RATE_HZ);
  bandsDb.forEach((levelDb, band) => {
    const octave = OCTAVE_BANDS.find(({ nominalHz }) => nominalHz === OCTAVE_BANDS_HZ[band]);
    if (levelDb === null || !octave) return;
    const amplitude = REFERENCE_PA * 10 ** (levelDb / 20) * Math.sqrt(2 / TONES_AN_OCTAVE);
    for (let tone = 0; tone < TONES_AN_OCTAVE; tone++) {
      const wantedHz =
        octave.lowerHz * (octave.upperHz / octave.lowerHz) ** ((tone + 0.5) / TONES_AN_OCTAVE);
      const step = (2 * Math.PI * Math.round(wantedHz * LOOP_S)) / LOOP_S / RATE_HZ;
      const phase = 2 * Math.PI * chance(seed, band, tone);
      // x(n) = 2·cos(step)·x(n − 1) − x(n − 2).
      const turn = 2 * Math.cos(step);
      let [before, now] = [Math.sin(phase - step), Math.sin(phase)];
      for (let at = 0; at < loop.length; at++) {
        loop[at]! += amplitude * now;
        [before, now] = [now, turn * now - before];
      }
    }
  });
  return loop;
}

/** A mono WAV of 16 bits that holds a noise with these octave levels, dB, for so many seconds. */
export function noiseRecording(
  bandsDb: OctaveBandValues,
  seconds: number,
  pascalPerFullScale: number,
  seed: string,
): Buffer {
  const loop = loopOf(bandsDb, seed);
  const dataBytes = seconds * RATE_HZ * BYTES_A_SAMPLE;
  const bytes = Buffer.alloc(44 + dataBytes);
  bytes.write("RIFF", 0, "latin1");
  bytes.writeUInt32LE(36 + dataBytes, 4);
  bytes.write("WAVEfmt ", 8, "latin1");
  bytes.writeUInt32LE(16, 16);
  bytes.writeUInt16LE(1, 20);
  bytes.writeUInt16LE(1, 22);
  bytes.writeUInt32LE(RATE_HZ, 24);
  bytes.writeUInt32LE(RATE_HZ * BYTES_A_SAMPLE, 28);
  bytes.writeUInt16LE(BYTES_A_SAMPLE, 32);
  bytes.writeUInt16LE(8 * BYTES_A_SAMPLE, 34);
  bytes.write("data", 36, "latin1");
  bytes.writeUInt32LE(dataBytes, 40);
  for (let at = 0; at < seconds * RATE_HZ; at++) {
    const value = Math.round((32_767 * loop[at % loop.length]!) / pascalPerFullScale);
    bytes.writeInt16LE(Math.max(-32_768, Math.min(32_767, value)), 44 + BYTES_A_SAMPLE * at);
  }
  return bytes;
}
