// @vitest-environment jsdom
import { act, cleanup, render, screen } from "@testing-library/react";
import { afterEach, expect, test, vi } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { Loading } from "./loading";

afterEach(() => {
  cleanup();
  vi.useRealTimers();
});

test("a quick page says nothing meanwhile; a server that keeps silent is said to", async () => {
  vi.useFakeTimers();
  render(
    <TestLanguage>
      <Loading />
    </TestLanguage>,
  );
  expect(screen.getByRole("status")).toBeEmptyDOMElement();
  await act(() => vi.advanceTimersByTimeAsync(3_000));
  expect(screen.getByRole("status")).toHaveTextContent(/^The server has not answered yet\./);
});
