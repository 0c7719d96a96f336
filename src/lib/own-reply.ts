import type { ReplySchema } from "./api";

/**
 * A reply that is checked by hand: first pages ask for it, where the whole of the schemas' library would be most of the
 * page. `members` are those without which the page can't be drawn.
 */
export function ownReply<T extends object>(...members: (keyof T & string)[]): ReplySchema<T> {
  return {
    parse(value: unknown): T {
      if (typeof value === "object" && value !== null && members.every((name) => name in value))
        return value as T;
      throw new Error(`the reply lacks ${members.join(", ")}`);
    },
  };
}
