import { get } from "react-hook-form";

/** The first message under a name: that of the whole, or of whichever row has one. */
export function messageUnder(errors: object, name: string): string | undefined {
  const find = (value: unknown): string | undefined => {
    if (typeof value !== "object" || value === null) return undefined;
    const { message } = value as { message?: unknown };
    if (typeof message === "string") return message;
    for (const [key, child] of Object.entries(value)) {
      // A field's own element is not part of what is wrong with it.
      const found = key === "ref" ? undefined : find(child);
      if (found) return found;
    }
    return undefined;
  };
  return find(get(errors, name));
}
