import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { readAs, rememberChoice } from "./i18n";
import { testI18n } from "./test-i18n";

beforeEach(() => {
  sessionStorage.clear();
});
afterEach(() => {
  document.documentElement.lang = "en";
});

test("whoever signs in reads the language that is theirs, not the browser's", async () => {
  const i18n = testI18n();
  const keep = vi.fn(async () => undefined);
  await readAs(i18n, "de", keep);
  expect(i18n.locale).toBe("de");
  expect(document.documentElement.lang).toBe("de");
  expect(keep).not.toHaveBeenCalled();
});

test("what was chosen on the sign-in page comes before it, and is kept once", async () => {
  const i18n = testI18n();
  const keep = vi.fn(async () => undefined);
  rememberChoice("en");
  await readAs(i18n, "de", keep);
  expect(i18n.locale).toBe("en");
  expect(keep.mock.calls).toEqual([["en"]]);
  await readAs(i18n, "de", keep);
  expect(i18n.locale).toBe("de");
  expect(keep).toHaveBeenCalledTimes(1);
});
