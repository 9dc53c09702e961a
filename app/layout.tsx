import type { Metadata, Viewport } from "next";
import localFont from "next/font/local";
import { cookies, headers } from "next/headers";
import type { ReactNode } from "react";
import { NonceBridge } from "@/components/ui/NonceBridge";
import "./globals.css";

const serif = localFont({
  src: [
    { path: "../node_modules/@fontsource-variable/newsreader/files/newsreader-latin-opsz-normal.woff2", style: "normal" },
    { path: "../node_modules/@fontsource-variable/newsreader/files/newsreader-latin-opsz-italic.woff2", style: "italic" },
  ],
  weight: "200 800",
  variable: "--font-serif",
});

const sans = localFont({
  src: "../node_modules/@fontsource-variable/schibsted-grotesk/files/schibsted-grotesk-latin-wght-normal.woff2",
  weight: "400 900",
  variable: "--font-sans",
});

const mono = localFont({
  src: [
    { path: "../node_modules/@fontsource/commit-mono/files/commit-mono-latin-400-normal.woff2", weight: "400" },
    { path: "../node_modules/@fontsource/commit-mono/files/commit-mono-latin-600-normal.woff2", weight: "600" },
  ],
  variable: "--font-mono",
});

export const metadata: Metadata = {
  title: { default: "Firstlow", template: "%s · Firstlow" },
  description: "Where a logic capture of a two-wire bus becomes a case that can be proved and handed on.",
};

export const viewport: Viewport = { width: "device-width", initialScale: 1 };

/** The theme comes from a cookie, so the first paint is right without a script; without one the system decides (globals.css). */
async function chosenTheme(): Promise<"paper" | "night" | undefined> {
  const value = (await cookies()).get("firstlow-theme")?.value;
  return value === "paper" || value === "night" ? value : undefined;
}

export default async function RootLayout({ children }: { children: ReactNode }) {
  const nonce = /'nonce-([^']+)'/.exec((await headers()).get("content-security-policy") ?? "")?.[1] ?? "";
  return (
    <html lang="en" data-theme={await chosenTheme()} className={`${serif.variable} ${sans.variable} ${mono.variable}`}>
      <body className="min-h-dvh bg-paper text-ink antialiased">
        <NonceBridge nonce={nonce} />
        {children}
      </body>
    </html>
  );
}
