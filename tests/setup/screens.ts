import { AxeBuilder } from "@axe-core/playwright";
import type { Page } from "playwright-core";

/** What speaks against WCAG 2.2 AA, as far as a program can tell; of each rule the first place. */
export async function accessibilityFaults(page: Page): Promise<string[]> {
  const { violations } = await new AxeBuilder({ page })
    .withTags(["wcag2a", "wcag2aa", "wcag21aa", "wcag22aa"])
    .analyze();
  return violations.map(
    ({ id, nodes }) => `${id}: ${nodes[0]?.html.slice(0, 300)} ${nodes[0]?.failureSummary ?? ""}`,
  );
}
