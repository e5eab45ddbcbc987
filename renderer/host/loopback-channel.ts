import type { Channel } from "../../core/contract/envelope.ts";

/** What the loopback channel needs of its surroundings, so that it runs outside a browser too. */
export interface LoopbackOpts {
  /** `http://127.0.0.1:PORT` */
  readonly origin: string;
  readonly token: string;
  readonly fetch: typeof fetch;
}

/**
 * Calls are one POST each, answered in the response; events come down one long response, a JSON message a line.
 * The connection counts as closed when that long response ends: the server is gone.
 */
export function createLoopbackChannel(opts: LoopbackOpts): Channel {
  let onMessage: ((message: unknown) => void) | undefined;
  let onClose: (() => void) | undefined;
  let isClosed = false;

  function close(): void {
    if (isClosed) return;
    isClosed = true;
    onClose?.();
  }

  function request(path: string, body: string): Promise<Response> {
    return opts.fetch(`${opts.origin}${path}`, {
      method: "POST",
      headers: { "Content-Type": "application/json", Authorization: `Bearer ${opts.token}` },
      body,
    });
  }

  async function call(message: unknown, body: string): Promise<void> {
    try {
      const response = await request("/api/call", body);
      const answer: unknown = response.ok ? await response.json() : refusal(message, response.status);
      if (!isClosed) onMessage?.(answer);
    } catch {
      // No answer at all means no server: the page has to say so.
      close();
    }
  }

  async function listen(): Promise<void> {
    try {
      const response = await request("/api/events", "{}");
      if (response.ok && response.body !== null) {
        for await (const line of lines(response.body)) {
          if (isClosed) return;
          if (line !== "") onMessage?.(JSON.parse(line));
        }
      }
    } catch {
      // The stream broke off: the same as its end.
    }
    close();
  }

  return {
    post(message) {
      const body = JSON.stringify(message);
      if (!isClosed) void call(message, body);
    },
    onMessage(listener) {
      onMessage = listener;
    },
    onClose(listener) {
      onClose = listener;
      void listen();
    },
  };
}

/** A refused request never reached the host, so that the answer is made up here. */
function refusal(message: unknown, status: number): unknown {
  const id = typeof message === "object" && message !== null && "id" in message ? message.id : -1;
  const detail = status === 413 ? "the project is too large to save" : `the request was refused (${status})`;
  return { kind: "fail", id, failure: { code: "internal", data: { detail } } };
}

async function* lines(body: ReadableStream<Uint8Array>): AsyncGenerator<string> {
  const reader = body.getReader();
  const decoder = new TextDecoder();
  let rest = "";
  for (;;) {
    const { done, value } = await reader.read();
    if (done) return;
    rest += decoder.decode(value, { stream: true });
    const parts = rest.split("\n");
    rest = parts.pop() ?? "";
    yield* parts;
  }
}
