import { expect } from "vitest";

interface PrintedMatchers<R = unknown> {
  /** Agrees with a number as a document prints it: within half of its last digit, a half rounded up. */
  toAgreeWithPrinted(printed: string): R;
}

declare module "vitest" {
  // biome-ignore lint/suspicious/noExplicitAny: the type parameter of the interface that is widened
  interface Matchers<T = any> extends PrintedMatchers<T> {}
}

/** Far below any printed digit: what binary arithmetic adds to an exact half. */
const MACHINE_NOISE = 1e-9;

export function agreesWithPrinted(received: number, printed: string): boolean {
  if (!/^[−-]?\d+(\.\d+)?$/.test(printed)) throw new RangeError(`Not a printed number: ${printed}`);
  const decimals = printed.split(".")[1]?.length ?? 0;
  const half = 10 ** -decimals / 2;
  const value = Number(printed.replace("−", "-"));
  return received >= value - half - MACHINE_NOISE && received < value + half + MACHINE_NOISE;
}

expect.extend({
  toAgreeWithPrinted(received: number, printed: string) {
    const pass = agreesWithPrinted(received, printed);
    return {
      pass,
      message: () =>
        `expected ${received} ${pass ? "not " : ""}to agree with the printed ${printed}`,
    };
  },
});
