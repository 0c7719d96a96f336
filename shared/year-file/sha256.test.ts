import { createHash, randomBytes } from "node:crypto";
import { expect, test } from "vitest";
import { Sha256 } from "./sha256";

test("the examples of FIPS 180-4", () => {
  const hash = (text: string) => new Sha256().update(new TextEncoder().encode(text)).digest();
  expect(hash("abc")).toBe("ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
  expect(hash("abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq")).toBe(
    "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1",
  );
});

test("bytes of any length, in pieces of any length, as another program has it", () => {
  for (let length = 0; length < 300; length += 1) {
    const bytes = randomBytes(length);
    const own = new Sha256();
    const piece = 1 + ((length * 7) % 190);
    for (let at = 0; at < length; at += piece) own.update(bytes.subarray(at, at + piece));
    expect(own.digest()).toBe(createHash("sha256").update(bytes).digest("hex"));
  }
});
