import { createContext, useContext, useState } from "react";

const PREFIX = "dinward.typed.";

/** Id of the user whose typing is kept on this device; before anybody is signed in nothing is. */
export const TypedBy = createContext<string | null>(null);

/** Where a user's typing is kept, or null for not at all. `name` says form and record. */
export function useTypedKey(name: string | null): string | null {
  const userId = useContext(TypedBy);
  return userId === null || name === null ? null : `${PREFIX}${userId} ${name}`;
}

/** What was kept there; null where nothing was. */
export function readTyped(key: string | null, revive?: (value: unknown) => unknown): unknown {
  if (key === null) return null;
  try {
    return JSON.parse(sessionStorage.getItem(key) ?? "null", (_, value) =>
      revive ? revive(value) : value,
    );
  } catch {
    // A browser without storage, or somebody else's text: nothing of ours is there.
    return null;
  }
}

/** Null takes it away. */
export function writeTyped(key: string | null, value: unknown): void {
  if (key === null) return;
  try {
    if (value === null) sessionStorage.removeItem(key);
    else sessionStorage.setItem(key, JSON.stringify(value));
  } catch {
    // Full, or not allowed: what is typed still stands on the page.
  }
}

/** At sign-out: nothing typed stays behind for whoever comes next. */
export function forgetTyped(): void {
  try {
    for (const key of Object.keys(sessionStorage))
      if (key.startsWith(PREFIX)) sessionStorage.removeItem(key);
  } catch {
    // Nothing was kept either.
  }
}

/** A text that outlives a reload and a lost session; emptied, it is forgotten. */
export function useTypedText(name: string): [string, (text: string) => void] {
  const key = useTypedKey(name);
  const read = () => ({ key, text: String(readTyped(key) ?? "") });
  const [held, setHeld] = useState(read);
  const { text } = held.key === key ? held : read();
  return [
    text,
    (next) => {
      writeTyped(key, next || null);
      setHeld({ key, text: next });
    },
  ];
}
