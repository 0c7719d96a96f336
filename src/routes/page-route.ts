import type { ComponentType } from "react";

/** An address and the page that stands there, loaded when somebody goes there. */
export interface PageRoute {
  readonly path: string;
  readonly lazy: () => Promise<{ Component: ComponentType }>;
}
