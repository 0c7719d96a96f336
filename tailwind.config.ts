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
      head: ["12.5px", "16px"],
      note: ["13.5px", "18px"],
      base: ["14px", "20px"],
      h2: ["15px", "20px"],
      lead: ["16.5px", "24px"],
      worker: ["17px", "24px"],
      dialog: ["21px", "27px"],
    },
  },
} satisfies Config;
