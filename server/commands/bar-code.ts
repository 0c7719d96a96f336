import type { Bar } from "../../shared/acoustics/protection/barred";

/** The problem's code where a device is out of the question for a worker. */
export const barCode = ({ code }: Bar) =>
  code === "gear" ? "not-with-gear" : code === "no-data" ? "no-data-no-fit" : "protector-archived";
