import { type RefObject, useEffect } from "react";

const PRODUCT = "Dinward";

/** The window's title, so that tabs, the history and those who hear it tell pages apart; from a heading, its words. */
export function usePageTitle(title: string | RefObject<HTMLElement | null>): void {
  useEffect(() => {
    const text = typeof title === "string" ? title : (title.current?.textContent ?? "");
    const words = text.replace(/\s+/g, " ").trim();
    document.title = words ? `${words} · ${PRODUCT}` : PRODUCT;
  });
  // Whatever comes next may have no heading yet: this page's name is not its.
  useEffect(() => {
    return () => {
      document.title = PRODUCT;
    };
  }, []);
}
