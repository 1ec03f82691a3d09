/** What a response needs to know for its headers. */
export interface HeaderOptions {
  nonce: string;
  /** Reached by https. */
  secure: boolean;
  /** Development injects styles and talks over a web socket. */
  development?: boolean;
}

/**
 * The content security policy: only what this server sends, scripts and style elements by nonce. Style attributes are
 * allowed for the charts; `data:` pictures are what the viewer and the charts hand over as files.
 */
export function contentSecurityPolicy({ nonce, development = false }: HeaderOptions): string {
  const byNonce = nonce ? ` 'nonce-${nonce}'` : "";
  return [
    "default-src 'none'",
    `script-src 'self'${byNonce}`,
    // A nonce would switch 'unsafe-inline' off again.
    development ? "style-src 'self' 'unsafe-inline'" : `style-src 'self'${byNonce}`,
    "style-src-attr 'unsafe-inline'",
    "img-src 'self' data: blob:",
    "font-src 'self'",
    `connect-src 'self'${development ? " ws:" : ""}`,
    "worker-src 'self'",
    "manifest-src 'self'",
    "object-src 'none'",
    "base-uri 'none'",
    "form-action 'self'",
    "frame-ancestors 'none'",
  ].join("; ");
}

const YEAR_SECONDS = 31_536_000;

/** Headers of every response: pages, data, problems, files and built assets alike. */
export function securityHeaders(options: HeaderOptions): Record<string, string> {
  return {
    "content-security-policy": contentSecurityPolicy(options),
    "x-content-type-options": "nosniff",
    // Not no-referrer: browsers would then send `Origin: null` with plain forms.
    "referrer-policy": "same-origin",
    "cross-origin-opener-policy": "same-origin",
    "cross-origin-resource-policy": "same-origin",
    "permissions-policy": "camera=(), geolocation=(), microphone=(), payment=(), usb=(), browsing-topics=()",
    ...(options.secure ? { "strict-transport-security": `max-age=${YEAR_SECONDS}; includeSubDomains` } : {}),
  };
}
