import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import {
  activateLocale,
  addCatalogue,
  CATALOGUE_PARTS,
  type CataloguePart,
  createI18n,
} from "../../shared/i18n/index";
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

const later = CATALOGUE_PARTS.filter((part) => part !== "base");
const keep = async () => undefined;

/** Messages that are only in one part, so that they show whether it came. */
async function wordsOf(part: CataloguePart, locale: "en" | "de"): Promise<string[]> {
  const [whole, base] = [await createI18n(locale, [part]), await createI18n(locale, ["base"])];
  return Object.keys(whole.messages).filter((id) => !(id in base.messages));
}

// A browser in one language, an account in the other and no cookie yet: page and session load at once.
describe.each([
  ["en", "de"],
  ["de", "en"],
] as const)("a browser in %s, an account in %s", (ofBrowser, ofAccount) => {
  test.each(later)("has the part %s in the account’s language", async (part) => {
    const expected = await wordsOf(part, ofAccount);
    expect(expected.length).toBeGreaterThan(0);
    const orders = [
      (i18n: Awaited<ReturnType<typeof createI18n>>) => [
        addCatalogue(i18n, part),
        readAs(i18n, ofAccount, keep),
      ],
      (i18n: Awaited<ReturnType<typeof createI18n>>) => [
        readAs(i18n, ofAccount, keep),
        addCatalogue(i18n, part),
      ],
      // The session answers when the page's words are already on their way.
      (i18n: Awaited<ReturnType<typeof createI18n>>) => [
        addCatalogue(i18n, part),
        Promise.resolve().then(() => readAs(i18n, ofAccount, keep)),
      ],
    ];
    for (const start of orders) {
      const i18n = await createI18n(ofBrowser, ["base"]);
      await Promise.all(start(i18n));
      expect(i18n.locale).toBe(ofAccount);
      expect(expected.filter((id) => !(id in i18n.messages))).toEqual([]);
    }
  });
});

test("a part that is on its way is waited for by everybody who asks", async () => {
  const i18n = await createI18n("de", ["base"]);
  const first = addCatalogue(i18n, "measuring");
  await addCatalogue(i18n, "measuring");
  const [id] = await wordsOf("measuring", "de");
  expect(id !== undefined && id in i18n.messages).toBe(true);
  await first;
  await activateLocale(i18n, "en");
  await activateLocale(i18n, "de");
  expect(id !== undefined && id in i18n.messages).toBe(true);
});
