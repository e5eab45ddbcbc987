/** `fetch` as our page's browser does it: with the page's own origin, which Node leaves off. */
export function fetchFrom(origin: string): typeof fetch {
  return (input, init) => {
    const headers = new Headers(init?.headers);
    headers.set("Origin", origin);
    return fetch(input, { ...init, headers });
  };
}

/** Swaps the code in an address for the session's token, as the page does when it is opened. */
export async function redeem(address: string): Promise<string> {
  const { origin, hash } = new URL(address);
  const response = await fetchFrom(origin)(`${origin}/api/session`, {
    method: "POST",
    headers: { "Content-Type": "application/json" },
    body: JSON.stringify({ code: hash.slice(1) }),
  });
  if (!response.ok) throw new Error(`the code was refused: ${response.status}`);
  return ((await response.json()) as { token: string }).token;
}
