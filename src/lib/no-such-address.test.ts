import { expect, test } from "vitest";
import { ApiError } from "./api";
import { isNoSuchAddress } from "./no-such-address";

const problem = (status: number, code: string, formats: string[] = []) =>
  new ApiError(
    status,
    code,
    {},
    formats.map((format) => ({ path: "date", code: "invalid_format", params: { format } })),
    null,
    "",
  );

test("what is not there, and an id or a date that is none, is no such address", () => {
  expect(isNoSuchAddress(problem(404, "not-found"))).toBe(true);
  expect(isNoSuchAddress(problem(422, "invalid", ["date", "uuid"]))).toBe(true);
});

test("a form that needs another look, and a server that is gone, are not", () => {
  expect(isNoSuchAddress(problem(422, "invalid"))).toBe(false);
  expect(isNoSuchAddress(problem(422, "invalid", ["uuid", "email"]))).toBe(false);
  expect(isNoSuchAddress(problem(404, "http-404"))).toBe(false);
  expect(isNoSuchAddress(problem(0, "no-connection"))).toBe(false);
  expect(isNoSuchAddress(new Error("not found"))).toBe(false);
});
