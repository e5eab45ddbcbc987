import { createHostClient, type HostClient } from "./client.ts";
import { createElectronChannel } from "./electron-channel.ts";
import { createLoopbackChannel } from "./loopback-channel.ts";

/** Only the session's token is kept in the browser, and only for this tab: a reload must not end the session. */
const TOKEN_KEY = "bandwright-token";

/** Thrown where this page has no right to its server: an address opened twice, or a server started anew. */
export class ConnectError extends Error {
  override readonly name = "ConnectError";
}

/** Connects to whichever shell this page runs in. */
export async function connectHost(): Promise<HostClient> {
  const bridge = window.bandwrightHost;
  if (bridge !== undefined) return createHostClient(createElectronChannel(bridge));
  const token = await obtainToken();
  const client = createHostClient(createLoopbackChannel({ origin: location.origin, token, fetch: fetch.bind(window) }));
  return client;
}

/** Swaps the one-time code in the address for the session's token, or takes the token this tab already has. */
async function obtainToken(): Promise<string> {
  const code = location.hash.slice(1);
  if (code !== "") {
    // Out of the address bar and the history before anything else can read it.
    history.replaceState(null, "", location.pathname);
    const token = await postForToken("/api/session", JSON.stringify({ code }), {});
    if (token !== null) {
      sessionStorage.setItem(TOKEN_KEY, token);
      return token;
    }
  }
  const kept = sessionStorage.getItem(TOKEN_KEY);
  if (kept !== null && (await postForToken("/api/resume", "{}", { Authorization: `Bearer ${kept}` })) !== null) return kept;
  sessionStorage.removeItem(TOKEN_KEY);
  throw new ConnectError(
    "This address has been used already, or Bandwright has been restarted since. Each start prints an address that works once: go back to the tab where it is open, or stop Bandwright (Ctrl+C) and start it again.",
  );
}

async function postForToken(path: string, body: string, headers: Record<string, string>): Promise<string | null> {
  const response = await fetch(path, { method: "POST", headers: { "Content-Type": "application/json", ...headers }, body });
  if (!response.ok) return null;
  const answer: unknown = await response.json();
  return typeof answer === "object" && answer !== null && "token" in answer && typeof answer.token === "string" ? answer.token : null;
}
