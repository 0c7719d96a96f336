const K = new Int32Array([
  0x428a2f98, 0x71374491, 0xb5c0fbcf, 0xe9b5dba5, 0x3956c25b, 0x59f111f1, 0x923f82a4, 0xab1c5ed5,
  0xd807aa98, 0x12835b01, 0x243185be, 0x550c7dc3, 0x72be5d74, 0x80deb1fe, 0x9bdc06a7, 0xc19bf174,
  0xe49b69c1, 0xefbe4786, 0x0fc19dc6, 0x240ca1cc, 0x2de92c6f, 0x4a7484aa, 0x5cb0a9dc, 0x76f988da,
  0x983e5152, 0xa831c66d, 0xb00327c8, 0xbf597fc7, 0xc6e00bf3, 0xd5a79147, 0x06ca6351, 0x14292967,
  0x27b70a85, 0x2e1b2138, 0x4d2c6dfc, 0x53380d13, 0x650a7354, 0x766a0abb, 0x81c2c92e, 0x92722c85,
  0xa2bfe8a1, 0xa81a664b, 0xc24b8b70, 0xc76c51a3, 0xd192e819, 0xd6990624, 0xf40e3585, 0x106aa070,
  0x19a4c116, 0x1e376c08, 0x2748774c, 0x34b0bcb5, 0x391c0cb3, 0x4ed8aa4a, 0x5b9cca4f, 0x682e6ff3,
  0x748f82ee, 0x78a5636f, 0x84c87814, 0x8cc70208, 0x90befffa, 0xa4506ceb, 0xbef9a3f7, 0xc67178f2,
]);

const turn = (x: number, n: number) => (x >>> n) | (x << (32 - n));

/**
 * SHA-256 (FIPS 180-4) of bytes that come in pieces: the browser's own wants the whole at once, and what is checked may be
 * larger than a laptop's memory.
 */
export class Sha256 {
  private readonly state = new Uint32Array([
    0x6a09e667, 0xbb67ae85, 0x3c6ef372, 0xa54ff53a, 0x510e527f, 0x9b05688c, 0x1f83d9ab, 0x5be0cd19,
  ]);
  private readonly block = new Uint8Array(64);
  private readonly view = new DataView(this.block.buffer);
  private readonly words = new Int32Array(64);
  private filled = 0;
  private totalBytes = 0;

  update(bytes: Uint8Array): this {
    this.totalBytes += bytes.length;
    let at = 0;
    if (this.filled > 0) {
      at = Math.min(64 - this.filled, bytes.length);
      this.block.set(bytes.subarray(0, at), this.filled);
      this.filled += at;
      if (this.filled < 64) return this;
      this.compress(this.view, 0);
      this.filled = 0;
    }
    const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
    for (; at + 64 <= bytes.length; at += 64) this.compress(view, at);
    this.block.set(bytes.subarray(at));
    this.filled = bytes.length - at;
    return this;
  }

  /** Hex. Nothing can be added afterwards. */
  digest(): string {
    const bits = this.totalBytes * 8;
    this.block[this.filled] = 0x80;
    this.block.fill(0, this.filled + 1);
    if (this.filled >= 56) {
      this.compress(this.view, 0);
      this.block.fill(0);
    }
    this.view.setUint32(56, Math.floor(bits / 2 ** 32));
    this.view.setUint32(60, bits >>> 0);
    this.compress(this.view, 0);
    return [...this.state].map((word) => word.toString(16).padStart(8, "0")).join("");
  }

  /** Takes in the 64 bytes from `at` on. Nothing is made in it that would have to be cleared away: it runs for each of them. */
  private compress(view: DataView, at: number): void {
    const { words, state } = this;
    for (let i = 0; i < 16; i += 1) words[i] = view.getInt32(at + 4 * i);
    for (let i = 16; i < 64; i += 1) {
      const x = words[i - 15]!;
      const y = words[i - 2]!;
      const s0 = turn(x, 7) ^ turn(x, 18) ^ (x >>> 3);
      const s1 = turn(y, 17) ^ turn(y, 19) ^ (y >>> 10);
      words[i] = (words[i - 16]! + s0 + words[i - 7]! + s1) | 0;
    }
    let a = state[0]! | 0;
    let b = state[1]! | 0;
    let c = state[2]! | 0;
    let d = state[3]! | 0;
    let e = state[4]! | 0;
    let f = state[5]! | 0;
    let g = state[6]! | 0;
    let h = state[7]! | 0;
    for (let i = 0; i < 64; i += 1) {
      const s1 = turn(e, 6) ^ turn(e, 11) ^ turn(e, 25);
      const t1 = (h + s1 + ((e & f) ^ (~e & g)) + K[i]! + words[i]!) | 0;
      const s0 = turn(a, 2) ^ turn(a, 13) ^ turn(a, 22);
      const t2 = (s0 + ((a & b) ^ (a & c) ^ (b & c))) | 0;
      h = g;
      g = f;
      f = e;
      e = (d + t1) | 0;
      d = c;
      c = b;
      b = a;
      a = (t1 + t2) | 0;
    }
    state[0]! += a;
    state[1]! += b;
    state[2]! += c;
    state[3]! += d;
    state[4]! += e;
    state[5]! += f;
    state[6]! += g;
    state[7]! += h;
  }
}
