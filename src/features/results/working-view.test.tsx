import { render, screen } from "@testing-library/react";
import { expect, test } from "vitest";
import type { WorkingSource } from "../../../shared/acoustics/working";
import { TestLanguage } from "../../lib/test-i18n";
import { WorkingStepView } from "./working-view";

const show = (sources: readonly WorkingSource[]) =>
  render(
    <TestLanguage>
      <WorkingStepView
        step={{
          number: 3,
          title: { id: "What the protector does, while worn" },
          tables: [],
          equations: [],
          details: [],
          shares: [],
          notes: [],
          sources,
          records: [],
        }}
      >
        {null}
      </WorkingStepView>
    </TestLanguage>,
  );

test("a step names its documents, and none where there is nothing to name", () => {
  const { unmount } = show([{ id: "iso-guide-98-3", clause: "4.2, 5.1" }]);
  expect(screen.getByText("Source.").parentElement?.textContent).toMatch(/Guide 98-3.*4\.2, 5\.1/);
  unmount();
  show([{ id: null, clause: "" }]);
  expect(screen.queryByText("Source.")).toBeNull();
});
