import regular from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-400-normal.woff2?url";
import medium from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-500-normal.woff2?url";
import semibold from "@fontsource/ibm-plex-sans/files/ibm-plex-sans-latin-600-normal.woff2?url";
import type { LinkDescriptor } from "react-router";

/** Fetches the fonts beside the style sheet instead of after it, so that no page is set twice. */
export const fontLinks: LinkDescriptor[] = [regular, medium, semibold].map((href) => ({
  rel: "preload",
  as: "font",
  type: "font/woff2",
  href,
  crossOrigin: "anonymous",
}));
