import { createHash, randomBytes, timingSafeEqual } from "node:crypto";
import { createServer, type IncomingMessage, type ServerResponse } from "node:http";
import type { AddressInfo } from "node:net";
import type { Duplex } from "node:stream";
import { SECURITY_HEADERS } from "./headers.ts";
import type { Host } from "./host.ts";
import { MAX_PROJECT_BYTES } from "./services/projects.ts";
import { findUiFile, type UiFiles } from "./ui-files.ts";

/** A call carries at most one project, and that without the file's indentation. */
const MAX_BODY_BYTES = MAX_PROJECT_BYTES + 64 * 1024;

/** The one request without a token carries a code; whoever else reaches the port cannot make us hold more. */
const MAX_CODE_BYTES = 1024;

/** A running loopback server. */
export interface LoopbackServer {
  /** `http://127.0.0.1:PORT` */
  readonly origin: string;
  /** Opens the page once: its fragment is swapped for the session's token. */
  readonly address: string;
  /** Resolves when the address has been used. */
  readonly opened: Promise<void>;
  close(): Promise<void>;
}

/** Thrown inside a request to end it with this status. */
class Refusal extends Error {
  readonly status: number;
  constructor(status: number, message: string) {
    super(message);
    this.status = status;
  }
}

/**
 * Serves the user interface and the host to a browser on this machine, and to nobody else.
 *
 * Other programs, other users and any web page open in the same browser can reach the port. So: the Host header has to
 * be ours (a foreign name that resolves to 127.0.0.1 fails there), the Origin too, and every call needs a token that
 * only our page has. Cookies would not do: browsers send them to every port of 127.0.0.1.
 */
export async function serveLoopback(host: Host, ui: UiFiles): Promise<LoopbackServer> {
  const token = secret();
  const code = secret();
  let isCodeUsed = false;
  const eventStreams = new Set<ServerResponse>();
  const { promise: opened, resolve: markOpened } = Promise.withResolvers<void>();

  // A missing Host header is refused with the wrong ones, and with our headers.
  const server = createServer({ requireHostHeader: false }, (request, response) => {
    void respond(request, response);
  });
  server.on("checkExpectation", (_request: IncomingMessage, response: ServerResponse) => send(response, 417, "Bandwright expects nothing but plain requests."));
  server.on("clientError", (_error: Error, socket: Duplex) => refuseSocket(socket));
  await new Promise<void>((resolve, reject) => {
    server.once("error", reject);
    server.listen({ host: "127.0.0.1", port: 0 }, resolve);
  });
  const authority = `127.0.0.1:${(server.address() as AddressInfo).port}`;
  const origin = `http://${authority}`;

  async function respond(request: IncomingMessage, response: ServerResponse): Promise<void> {
    try {
      requireOurs(request, authority, origin);
      if (request.method === "GET" || request.method === "HEAD") sendUi(request, response, ui);
      else if (request.method === "POST") await respondToPost(request, response);
      else throw new Refusal(request.method === "OPTIONS" ? 403 : 405, "Bandwright does not answer this kind of request.");
    } catch (error) {
      if (response.headersSent) response.destroy();
      else if (error instanceof Refusal) send(response, error.status, error.message);
      else send(response, 500, "Bandwright could not answer.");
    }
  }

  async function respondToPost(request: IncomingMessage, response: ServerResponse): Promise<void> {
    const path = request.url ?? "";
    if (path === "/api/session") {
      const body = await readJson(request, MAX_CODE_BYTES);
      const given = typeof body === "object" && body !== null && "code" in body ? body.code : null;
      if (isCodeUsed || typeof given !== "string" || !isSame(given, code)) throw new Refusal(403, "This address has been used already.");
      isCodeUsed = true;
      markOpened();
      sendJson(response, { token });
      return;
    }
    const bearer = /^Bearer ([\w-]+)$/.exec(request.headers.authorization ?? "")?.[1];
    if (bearer === undefined || !isSame(bearer, token)) throw new Refusal(401, "This call needs the session's token.");
    const body = await readJson(request, MAX_BODY_BYTES);
    if (path === "/api/call") {
      const answer = await host.answer(body);
      if (answer === null) throw new Refusal(400, "This is not a call.");
      sendJson(response, answer);
    } else if (path === "/api/events") {
      streamEvents(response, host);
      eventStreams.add(response);
      response.on("close", () => eventStreams.delete(response));
    } else if (path === "/api/resume") {
      sendJson(response, { token });
    } else {
      throw new Refusal(404, "There is nothing here.");
    }
  }

  return {
    origin,
    address: `${origin}/#${code}`,
    opened,
    async close() {
      await host.close();
      await new Promise<void>((resolve) => {
        // Answers on their way go out; event streams would stay open for ever, and so might a browser's connection.
        server.close(() => resolve());
        for (const stream of eventStreams) stream.end();
        setTimeout(() => server.closeAllConnections(), 500).unref();
      });
    },
  };
}

/** Refuses whatever was not sent by our own page, or by the user opening it. */
function requireOurs(request: IncomingMessage, authority: string, origin: string): void {
  const { host, origin: origins } = request.headersDistinct;
  if (host?.length !== 1 || host[0] !== authority) throw new Refusal(421, "This is not the address of Bandwright.");
  const url = request.url ?? "";
  if (!url.startsWith("/") || url.startsWith("//")) throw new Refusal(400, "This address cannot be read.");

  const isSameOrigin = origins?.length === 1 && origins[0] === origin;
  if (origins !== undefined && !isSameOrigin) throw new Refusal(403, "Another page asked for this.");
  if (request.method === "POST" && !isSameOrigin) throw new Refusal(403, "Calls come from Bandwright's own page.");

  const site = request.headersDistinct["sec-fetch-site"];
  if (site === undefined || site.every((value) => value === "same-origin" || value === "none")) return;
  // The start page sends the browser here from a file, which counts as another site. Showing the page gives nothing
  // away: it cannot be framed, and has no token yet.
  const isOpeningPage = request.method === "GET" && url === "/" && request.headers["sec-fetch-mode"] === "navigate" && request.headers["sec-fetch-dest"] === "document";
  if (!isOpeningPage) throw new Refusal(403, "Another page asked for this.");
}

function sendUi(request: IncomingMessage, response: ServerResponse, ui: UiFiles): void {
  const file = findUiFile(ui, (request.url ?? "").split("?", 1)[0] ?? "");
  if (file === null) throw new Refusal(404, "There is nothing here.");
  response.writeHead(200, { ...SECURITY_HEADERS, "Content-Type": file.type, "Content-Length": file.body.byteLength });
  response.end(request.method === "HEAD" ? undefined : file.body);
}

function streamEvents(response: ServerResponse, host: Host): void {
  response.writeHead(200, { ...SECURITY_HEADERS, "Content-Type": "application/x-ndjson", Connection: "close" });
  // An empty line sends the headers off, so that the page knows it is listening.
  response.write("\n");
  const stop = host.onEvent((message) => response.write(`${JSON.stringify(message)}\n`));
  response.on("close", stop);
}

async function readJson(request: IncomingMessage, most: number): Promise<unknown> {
  if (!/^application\/json\b/i.test(request.headers["content-type"] ?? "")) throw new Refusal(415, "Calls are sent as JSON.");
  const tooLarge = new Refusal(413, "This is too large.");
  if (Number(request.headers["content-length"] ?? 0) > most) throw tooLarge;
  const chunks: Buffer[] = [];
  let size = 0;
  for await (const chunk of request) {
    if (!Buffer.isBuffer(chunk)) throw new Refusal(400, "This body cannot be read.");
    size += chunk.length;
    if (size > most) throw tooLarge;
    chunks.push(chunk);
  }
  try {
    return JSON.parse(Buffer.concat(chunks).toString("utf8"));
  } catch {
    throw new Refusal(400, "This body is not JSON.");
  }
}

function send(response: ServerResponse, status: number, text: string): void {
  // The rest of a refused request is not waited for, so that the connection cannot be used again.
  response.writeHead(status, { ...SECURITY_HEADERS, "Content-Type": "text/plain; charset=utf-8", Connection: "close" });
  response.end(`${text}\n`);
}

function sendJson(response: ServerResponse, value: unknown): void {
  response.writeHead(200, { ...SECURITY_HEADERS, "Content-Type": "application/json; charset=utf-8" });
  response.end(JSON.stringify(value));
}

/** For requests that Node cannot parse; its own answer would go without our headers. */
function refuseSocket(socket: Duplex): void {
  if (!socket.writable) return;
  const headers = Object.entries({ ...SECURITY_HEADERS, Connection: "close", "Content-Length": "0" });
  socket.end(`HTTP/1.1 400 Bad Request\r\n${headers.map(([name, value]) => `${name}: ${value}\r\n`).join("")}\r\n`);
}

function secret(): string {
  return randomBytes(32).toString("base64url");
}

/** Compares without telling by the time taken how much was right; the digests make the lengths equal. */
function isSame(given: string, wanted: string): boolean {
  return timingSafeEqual(createHash("sha256").update(given).digest(), createHash("sha256").update(wanted).digest());
}
