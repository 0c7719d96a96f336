import { useSyncExternalStore } from "react";

const QUERY = "(max-width: 759.98px)";
const media = () => (typeof matchMedia === "undefined" ? null : matchMedia(QUERY));

/** For what a style sheet can't do: drawings whose width is a number. */
export function useIsPhone(): boolean {
  return useSyncExternalStore(
    (listener) => {
      const list = media();
      list?.addEventListener("change", listener);
      return () => list?.removeEventListener("change", listener);
    },
    () => media()?.matches ?? false,
  );
}
