"use client";

import { useEffect, useState } from "react";

type Theme = "paper" | "night";

function present(): Theme {
  const chosen = document.documentElement.dataset.theme;
  if (chosen === "paper" || chosen === "night") return chosen;
  return window.matchMedia("(prefers-color-scheme: dark)").matches ? "night" : "paper";
}

/** Chooses paper or night and remembers it in a cookie, so that the next page arrives already in it. */
export function ThemeToggle() {
  const [theme, setTheme] = useState<Theme | null>(null);
  useEffect(() => {
    setTheme(present());
  }, []);

  function change() {
    const next: Theme = present() === "paper" ? "night" : "paper";
    document.documentElement.dataset.theme = next;
    // biome-ignore lint/suspicious/noDocumentCookie: the server must see the choice with the next request
    document.cookie = `firstlow-theme=${next}; path=/; max-age=31536000; samesite=lax`;
    setTheme(next);
    window.dispatchEvent(new Event("firstlow-theme"));
  }

  return (
    <button
      type="button"
      onClick={change}
      aria-label={`Theme: ${theme ?? "system"}. Change`}
      className="border-b border-field pb-px hover:border-ink"
    >
      {theme === "night" ? "Paper" : "Night"}
    </button>
  );
}
