import type { ComponentType } from "react";
import type { SessionRole } from "../../shared/schemas/session";

/** An address and the page that stands there, loaded when somebody goes there. */
export interface PageRoute {
  readonly path: string;
  readonly lazy: () => Promise<{ Component: ComponentType }>;
  /** Whose page it is, where it is not everybody's of its group. The server decides all the same. */
  readonly roles?: readonly SessionRole[];
}
