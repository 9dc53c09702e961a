"use client";

import { useEffect, useState } from "react";

/** The theme's colours for a canvas, which cannot read CSS variables by itself. */
export interface Ink {
  readonly paper: string;
  readonly ink: string;
  readonly quiet: string;
  readonly hairline: string;
  readonly field: string;
  readonly accent: string;
  readonly broken: string;
  readonly contest: string;
  readonly mono: string;
  readonly sans: string;
  readonly serif: string;
}

function read(): Ink {
  const style = getComputedStyle(document.documentElement);
  const colour = (name: string) => `rgb(${style.getPropertyValue(`--${name}`).trim().split(/\s+/).join(", ")})`;
  const face = (name: string) => style.getPropertyValue(`--font-${name}`).trim();
  return {
    paper: colour("paper"),
    ink: colour("ink"),
    quiet: colour("quiet"),
    hairline: colour("hairline"),
    field: colour("field"),
    accent: colour("accent"),
    broken: colour("broken"),
    contest: colour("contest"),
    mono: face("mono") || "monospace",
    sans: face("sans") || "sans-serif",
    serif: face("serif") || "serif",
  };
}

/** Follows the toggle and the system; null until the page is there. */
export function useInk(): Ink | null {
  const [ink, setInk] = useState<Ink | null>(null);
  useEffect(() => {
    const refresh = () => setInk(read());
    refresh();
    document.fonts?.ready.then(refresh);
    const dark = window.matchMedia("(prefers-color-scheme: dark)");
    const print = window.matchMedia("print");
    dark.addEventListener("change", refresh);
    print.addEventListener("change", refresh);
    window.addEventListener("firstlow-theme", refresh);
    return () => {
      dark.removeEventListener("change", refresh);
      print.removeEventListener("change", refresh);
      window.removeEventListener("firstlow-theme", refresh);
    };
  }, []);
  return ink;
}
