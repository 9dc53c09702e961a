import { type NextRequest, NextResponse } from "next/server";
import { development, settings } from "@/lib/server/settings";

/** Pages only: answers of /api say what they need themselves, and static files need none of this. */
export const config = {
  matcher: [{ source: "/((?!api/|_next/static|_next/image|icon.svg).*)" }],
};

/** Gives every page a content policy with a fresh nonce. It decides nothing about who may see what. */
export function proxy(request: NextRequest): NextResponse {
  const nonce = btoa(String.fromCharCode(...crypto.getRandomValues(new Uint8Array(16))));
  const policy = contentPolicy(nonce, new URL(settings().storage.publicEndpoint).origin, development());
  const headers = new Headers(request.headers);
  // The framework reads the nonce for its own scripts from the request.
  headers.set("content-security-policy", policy);
  const response = NextResponse.next({ request: { headers } });
  response.headers.set("content-security-policy", policy);
  // Addresses of invitations, resets and shares are secrets: they are told to no other site.
  response.headers.set("referrer-policy", "same-origin");
  response.headers.set("x-content-type-options", "nosniff");
  response.headers.set("x-frame-options", "DENY");
  response.headers.set("cross-origin-opener-policy", "same-origin");
  response.headers.set("permissions-policy", "camera=(), microphone=(), geolocation=(), payment=(), usb=()");
  // Also where no page is rendered: a share link never gets into an index.
  if (request.nextUrl.pathname.startsWith("/shared/")) response.headers.set("x-robots-tag", "noindex, nofollow");
  if (settings().app.secureCookies) response.headers.set("strict-transport-security", "max-age=31536000");
  return response;
}

function contentPolicy(nonce: string, storage: string, developing: boolean): string {
  // The development server writes its own style elements and evaluates modules; a nonce would cancel 'unsafe-inline'.
  const styles = developing ? "'unsafe-inline'" : `'nonce-${nonce}'`;
  return [
    "default-src 'self'",
    `script-src 'self' 'nonce-${nonce}' 'strict-dynamic'${developing ? " 'unsafe-eval'" : ""}`,
    "worker-src 'self'",
    `style-src 'self' ${styles}`,
    // Heights of virtual rows stand in style attributes of server-rendered HTML.
    "style-src-attr 'unsafe-inline'",
    "img-src 'self' blob: data:",
    "font-src 'self'",
    `connect-src 'self' ${storage}${developing ? " ws:" : ""}`,
    "object-src 'none'",
    "base-uri 'self'",
    "form-action 'self'",
    "frame-ancestors 'none'",
  ].join("; ");
}
