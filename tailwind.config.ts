import type { Config } from "tailwindcss";

const token = (name: string) => `var(--${name})`;

export default {
  content: ["./index.html", "./src/**/*.{ts,tsx}"],
  darkMode: ["selector", '[data-theme="dark"]'],
  theme: {
    colors: {
      transparent: "transparent",
      current: "currentColor",
      paper: token("paper"),
      leaf: token("leaf"),
      shade: token("shade"),
      ink: { DEFAULT: token("ink"), 2: token("ink-2"), 3: token("ink-3") },
      rule: token("rule"),
      hair: token("hair"),
      v7: token("v7"),
      v6: token("v6"),
      v4: token("v4"),
      v2: token("v2"),
      v1: token("v1"),
    },
    fontFamily: { next: token("font-next"), mono: token("font-mono") },
    borderRadius: { none: "0", DEFAULT: "2px" },
    screens: { phone: { max: "759.98px" }, narrow: { max: "1099.98px" }, wide: "1100px" },
    fontSize: {
      head: ["0.78125rem", "1rem"],
      note: ["0.84375rem", "1.125rem"],
      base: ["0.875rem", "1.25rem"],
      h2: ["0.9375rem", "1.25rem"],
      lead: ["1.03125rem", "1.5rem"],
      worker: ["1.0625rem", "1.5rem"],
      dialog: ["1.3125rem", "1.6875rem"],
    },
  },
} satisfies Config;
