// @vitest-environment jsdom
import { cleanup, fireEvent, render, screen } from "@testing-library/react";
import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { Dialog } from "./dialog";

// jsdom has the element without its methods.
beforeEach(() => {
  HTMLDialogElement.prototype.showModal = function showModal() {
    this.open = true;
  };
  HTMLDialogElement.prototype.close = function close() {
    this.open = false;
  };
});
afterEach(cleanup);

test("a dialog has its title for a name, and Escape asks to close it", () => {
  const onClose = vi.fn();
  render(
    <Dialog
      isOpen
      onClose={onClose}
      title="Someone saved this before you"
      actions={<button type="button">Keep</button>}
    >
      Choose what stands.
    </Dialog>,
  );
  const dialog = screen.getByRole("dialog", { name: "Someone saved this before you" });
  fireEvent(dialog, new Event("cancel", { cancelable: true }));
  expect(onClose).toHaveBeenCalledTimes(1);
});

test("a closed dialog is not there", () => {
  render(<Dialog isOpen={false} onClose={() => {}} title="Title" actions={null} />);
  expect(screen.queryByRole("dialog")).toBeNull();
});
