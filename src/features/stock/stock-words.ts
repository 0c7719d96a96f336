import type { I18n } from "@lingui/core";
import type { StockRow } from "../../../shared/schemas/stock";
import type { StockMove } from "./queries";

export function partWord(i18n: I18n, part: StockRow["part"]): string {
  switch (part) {
    case "device":
      return i18n.t("Device");
    case "cushions":
      return i18n.t("Cushions");
    case "tips":
      return i18n.t("Tips");
  }
}

export function moveWord(i18n: I18n, kind: StockMove["kind"]): string {
  switch (kind) {
    case "received":
      return i18n.t("Received");
    case "issued":
      return i18n.t("Issued");
    case "returned":
      return i18n.t("Brought back");
    case "lost":
      return i18n.t("Lost");
    case "damaged":
      return i18n.t("Damaged");
    case "counted":
      return i18n.t("Counted, the difference");
    case "changed":
      return i18n.t("Changed on a device");
  }
}

/** What a figure of the stock means where there is nothing left; null where there is something. */
export function shortWord(i18n: I18n, quantity: number): string | null {
  if (quantity > 0) return null;
  return quantity === 0
    ? i18n.t("none left")
    : i18n.t("{count} more went out than came in: count it", { count: -quantity });
}

/** Whether it is asked for at all: what nobody has and nobody counts is only history. */
export const isShort = ({ quantity }: Pick<StockRow, "quantity">) => quantity <= 0;
