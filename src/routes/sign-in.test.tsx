// @vitest-environment jsdom
import { render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { expect, test } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { Component as SignInPage } from "./sign-in";

const show = (address: string) =>
  render(
    <TestLanguage>
      <MemoryRouter initialEntries={[address]}>
        <SignInPage />
      </MemoryRouter>
    </TestLanguage>,
  );

test("too many tries are told in words, and the way back is kept", () => {
  show("/sign-in?problem=too-many-tries&minutes=7&returnTo=%2Ffindings");
  expect(screen.getByRole("alert")).toHaveTextContent(
    "Too many tries. Wait 7 minutes, then try again.",
  );
  expect(screen.getByRole("link", { name: "Go to sign-in" })).toHaveAttribute(
    "href",
    "/api/auth/sign-in?returnTo=%2Ffindings",
  );
});

test("an address without a problem, or with one that nobody knows, says none", () => {
  show("/sign-in?problem=no-such");
  expect(screen.queryByRole("alert")).toBeNull();
});
