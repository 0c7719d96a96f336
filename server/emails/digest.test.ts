import { expect, test } from "vitest";
import { createI18n, type Locale } from "../../shared/i18n";
import { type DigestFacts, digestMail } from "./digest";

type OfCrew = DigestFacts["crews"][number];
const crew = (overrides: Partial<OfCrew> = {}): OfCrew => ({
  name: "Early",
  usualStart: "06:00",
  expectedDate: "2026-12-02",
  expected: 9,
  absentNames: [],
  lent: [],
  orders: [],
  handOverBy: null,
  ...overrides,
});
const mail = async (locale: Locale, ...crews: OfCrew[]) =>
  digestMail(await createI18n(locale), locale, {
    recipientName: "B. Rowntree-Adair",
    organizationName: "Ostmere",
    siteName: "Ostmere works",
    date: "2026-12-02",
    crews,
    link: "https://dinward.example/crew-sheet",
    accountLink: "https://dinward.example/account#digest",
  });

test("where the day’s shift is over the next one is named with its day", async () => {
  const { text } = await mail("en", crew(), crew({ name: "Late", expectedDate: "2026-12-03" }));
  expect(text).toContain("Early, 06:00. Expected: 9.\nNo order is open.");
  expect(text).toContain("Late, Thursday 3 December, 06:00. Expected: 9.");
});

test("text and page say the same; what is somebody’s own is no markup", async () => {
  const { subject, text, html } = await mail(
    "en",
    crew({
      absentNames: ["A. <b>Away</b>", "C. Dubois-Hale"],
      lent: [{ name: "H. Abdirahim", crewName: "Test cell days" }],
      orders: [{ name: "R. Szabó", kind: "no-protector", facts: {} }],
      handOverBy: "S. Ferrand",
    }),
  );
  expect(subject).toBe("Wednesday 2 December: one order is open");
  for (const line of [
    "Not in: A. <b>Away</b>, C. Dubois-Hale.",
    "H. Abdirahim: lent to Test cell days",
    "Handed to you by S. Ferrand",
  ]) {
    expect(text).toContain(line);
    expect(html).toContain(line.replaceAll("<", "&#60;").replaceAll(">", "&#62;"));
  }
  expect(text).toContain("R. Szabó: ");
  expect(text).toContain("https://dinward.example/account#digest");
  expect(html).toContain('href="https://dinward.example/account#digest"');
  expect(html).not.toContain("<b>");
});

test.each(["de", "es", "pl"] as const)("counts its orders in %s", async (locale) => {
  const order: OfCrew["orders"][number] = { name: "R. Szabó", kind: "no-protector", facts: {} };
  for (const count of [0, 1, 2, 5]) {
    const { subject } = await mail(locale, crew({ orders: Array(count).fill(order) }));
    expect(subject).not.toContain("{");
  }
});
