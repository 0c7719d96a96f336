// @vitest-environment jsdom
import { cleanup, render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter, Route, Routes, useParams } from "react-router-dom";
import { afterEach, beforeEach, expect, test } from "vitest";
import { useKeepFindingOrder } from "../../lib/finding-order";
import { TypedBy } from "../../lib/keep-typed";
import { TestLanguage } from "../../lib/test-i18n";
import { BetweenFindings } from "./between-findings";

const [first, second, third] = ["a1", "b2", "c3"];

beforeEach(() => sessionStorage.clear());
afterEach(cleanup);

function List() {
  useKeepFindingOrder([first, second, third]);
  return null;
}

function Finding() {
  const { id = "" } = useParams();
  return (
    <main>
      <h1>{`Finding ${id}`}</h1>
      <BetweenFindings id={id} />
      <label>
        Comment
        <input />
      </label>
    </main>
  );
}

/** A list was on the page before, for this reader. */
function show(at: string, hasList = true) {
  if (hasList) {
    render(
      <TypedBy value="reader">
        <List />
      </TypedBy>,
    );
  }
  render(
    <TypedBy value="reader">
      <TestLanguage>
        <MemoryRouter initialEntries={[`/findings/${at}`]}>
          <Routes>
            <Route path="/findings/:id" element={<Finding />} />
          </Routes>
        </MemoryRouter>
      </TestLanguage>
    </TypedBy>,
  );
}

test("j and k go through the list that one came from, and stay at its ends", async () => {
  const user = userEvent.setup();
  show(first);
  expect(screen.getByText(/1 of 3 in the list/)).toBeInTheDocument();
  await user.keyboard("k");
  expect(screen.getByRole("heading")).toHaveTextContent("Finding a1");
  await user.keyboard("j");
  expect(screen.getByRole("heading")).toHaveTextContent("Finding b2");
  await user.keyboard("jj");
  expect(screen.getByRole("heading")).toHaveTextContent("Finding c3");
  await user.keyboard("k");
  expect(screen.getByRole("heading")).toHaveTextContent("Finding b2");
});

test("a letter that is typed is a letter", async () => {
  const user = userEvent.setup();
  show(first);
  await user.type(screen.getByRole("textbox", { name: "Comment" }), "jk");
  expect(screen.getByRole("heading")).toHaveTextContent("Finding a1");
  await user.keyboard("{Control>}j{/Control}");
  expect(screen.getByRole("heading")).toHaveTextContent("Finding a1");
});

test("without a list, or from elsewhere, there is nothing to go through", () => {
  show("z9");
  expect(screen.queryByRole("navigation")).toBeNull();
  cleanup();
  sessionStorage.clear();
  show(first, false);
  expect(screen.queryByRole("navigation")).toBeNull();
});
