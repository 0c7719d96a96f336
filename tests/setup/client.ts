import "@testing-library/jest-dom/vitest";
import { cleanup } from "@testing-library/react";
import { afterEach, beforeEach, expect, vi } from "vitest";

const consoleError = vi.spyOn(console, "error");
const fetchSpy = vi.spyOn(globalThis, "fetch");

beforeEach(() => {
  consoleError.mockReset();
  consoleError.mockImplementation((...words: unknown[]) =>
    process.stderr.write(`${words.join(" ")}\n`),
  );
  fetchSpy.mockReset();
  fetchSpy.mockImplementation((input) => {
    throw new Error(`unhandled request: ${input instanceof Request ? input.url : input}`);
  });
});

/** A warning of React's, or a request that no test answers, is a failure. */
afterEach(() => {
  cleanup();
  expect(consoleError.mock.calls).toEqual([]);
});
