import { expect, test } from "vitest";
import {
  formatLevel,
  formatLevelChange,
  formatLimit,
  formatUncertainty,
  formatWholeLevel,
} from "./level";

test("a level has one decimal in either language", () => {
  expect(formatLevel(86.73513099976958, "en")).toBe("86.7");
  expect(formatLevel(86.73513099976958, "de")).toBe("86,7");
});

test("a bound says which way it bounds", () => {
  expect(formatLevel(84.1, "en", "lower")).toBe("\u226584.1");
  expect(formatLevel(95, "en", "upper")).toBe("\u226495.0");
});

test("missing is not zero", () => {
  expect(formatLevel(null, "en")).toBe("\u2013");
  expect(formatLevel(0, "en")).toBe("0.0");
  expect(formatUncertainty(null, "en")).toBe("");
});

test("limits are as short as they are, changes carry their sign", () => {
  expect(formatLimit(87, "en")).toBe("87");
  expect(formatLimit(80.5, "de")).toBe("80,5");
  expect(formatLevelChange(1.7, "en")).toBe("+1.7");
  expect(formatLevelChange(-0.3, "en")).toBe("\u22120.3");
  expect(formatLevelChange(0.04, "en")).toBe("0.0");
  expect(formatUncertainty(2.2955722608011286, "en")).toBe("\u00b12.3");
  expect(formatWholeLevel(78.9, "en")).toBe("79");
});

test("a worker's level has a tenth where it would read as the limit that it is not at", () => {
  expect(formatWholeLevel(87.4, "en", 87)).toBe("87.4");
  expect(formatWholeLevel(86.6, "de", 87)).toBe("86,6");
  expect(formatWholeLevel(87, "en", 87)).toBe("87");
  expect(formatWholeLevel(88.4, "en", 87)).toBe("88");
  expect(formatWholeLevel(87.4, "en")).toBe("87");
});
