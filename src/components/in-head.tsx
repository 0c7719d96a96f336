import { createContext, type ReactNode, useContext } from "react";
import { createPortal } from "react-dom";

/** The place in the running head for a page's own words; undefined where the head has none, null until it is drawn. */
export const HeadPlace = createContext<HTMLElement | null | undefined>(undefined);

/** Stands in the running head where that has a place for it; else where it is written. */
export function InHead({ children }: { children: ReactNode }) {
  const place = useContext(HeadPlace);
  if (place === undefined) return <>{children}</>;
  return place && createPortal(children, place);
}
