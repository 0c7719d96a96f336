import type { Bar } from "../../shared/acoustics/protection/barred";

/** The problem's code where a device is out of the question for a worker. */
export const barCode = ({ code }: Bar) => CODES[code];

const CODES = {
  gear: "not-with-gear",
  "cannot-wear": "cannot-be-worn",
  "no-data": "no-data-no-fit",
  archived: "protector-archived",
} as const;
