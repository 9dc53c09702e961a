import type { Config } from "tailwindcss";

/** Colours live as CSS variables (app/globals.css), so a theme is one attribute and a canvas can read the same values. */
const token = (name: string) => `rgb(var(--${name}) / <alpha-value>)`;

const config: Config = {
  content: ["./app/**/*.{ts,tsx}", "./components/**/*.{ts,tsx}"],
  darkMode: ["selector", '[data-theme="night"]'],
  theme: {
    extend: {
      colors: {
        paper: token("paper"),
        ink: token("ink"),
        quiet: token("quiet"),
        hairline: token("hairline"),
        field: token("field"),
        accent: token("accent"),
        broken: token("broken"),
        contest: token("contest"),
      },
      fontFamily: {
        serif: ["var(--font-serif)", "Georgia", "serif"],
        sans: ["var(--font-sans)", "Arial", "sans-serif"],
        mono: ["var(--font-mono)", "Consolas", "monospace"],
      },
      fontSize: {
        small: ["0.8125rem", "1.125rem"],
        label: ["0.875rem", "1.25rem"],
        hex: ["0.8125rem", "1.125rem"],
        body: ["1rem", "1.4rem"],
        lede: ["1.1875rem", "1.75rem"],
        head: ["1.875rem", "2.25rem"],
      },
    },
  },
};

export default config;
