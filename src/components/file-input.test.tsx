import { render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { expect, test, vi } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { FileInput } from "./file-input";

test("a file that is not what its name says is told so, and its name stays in sight", async () => {
  const params = { name: "sheet.pdf", found: "text/plain" };
  const issues = [{ path: ["file"], code: "file-not-as-named", params }];
  vi.stubGlobal("fetch", async () => Response.json({ code: "invalid", issues }, { status: 422 }));
  const onFiles = vi.fn();
  render(
    <TestLanguage>
      <FileInput
        label="File"
        accept="application/pdf"
        atMost={1}
        isOptional={false}
        files={[]}
        onFiles={onFiles}
      />
    </TestLanguage>,
  );
  const page = new File(["<html></html>"], "sheet.pdf", { type: "application/pdf" });
  await userEvent.upload(screen.getByLabelText("File"), page);
  expect(await screen.findByText("sheet.pdf: not taken")).toBeVisible();
  expect(screen.getByText(/^The content is not what the name says: sheet.pdf/)).toBeVisible();
  expect(onFiles).not.toHaveBeenCalled();
  vi.unstubAllGlobals();
});
