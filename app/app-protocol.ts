import { SECURITY_HEADERS } from "./headers.ts";
import { findUiFile, type UiFiles } from "./ui-files.ts";

/** The desktop window's own scheme; a page there has the origin `app://ui`. */
export const APP_SCHEME = "app";
const APP_HOST = "ui";
export const APP_PAGE = `${APP_SCHEME}://${APP_HOST}/`;

/** As Chromium writes it. (`new URL(…).origin` is "null" for a scheme that Node does not know.) */
export const APP_ORIGIN = `${APP_SCHEME}://${APP_HOST}`;

/** Whether an address is inside our own user interface. */
export function isAppUrl(url: string): boolean {
  const parsed = URL.parse(url);
  return parsed !== null && parsed.protocol === `${APP_SCHEME}:` && parsed.host === APP_HOST;
}

/** Answers a request of the desktop window for one of its files. */
export function answerAppRequest(ui: UiFiles, request: { readonly url: string; readonly method: string }): Response {
  if (!isAppUrl(request.url)) return refuse(403);
  if (request.method !== "GET") return refuse(405);
  const file = findUiFile(ui, new URL(request.url).pathname);
  if (file === null) return refuse(404);
  return new Response(file.body, { headers: { ...SECURITY_HEADERS, "Content-Type": file.type } });
}

function refuse(status: number): Response {
  return new Response(null, { status, headers: SECURITY_HEADERS });
}
