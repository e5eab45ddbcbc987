import { connect } from "node:net";
import { networkInterfaces } from "node:os";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { SECURITY_HEADERS } from "../../app/headers.ts";
import { createHost } from "../../app/host.ts";
import { serveLoopback, type LoopbackServer } from "../../app/serve.ts";
import { MAX_PROJECT_BYTES } from "../../app/services/projects.ts";
import { fakeHandlers } from "../helpers/fake-handlers.ts";
import { redeem } from "../helpers/loopback-fetch.ts";

const PAGE = "<!doctype html><title>Bandwright</title>";
const UI = new Map([
  ["/index.html", { type: "text/html; charset=utf-8", body: new TextEncoder().encode(PAGE) }],
  ["/assets/a b.js", { type: "text/javascript; charset=utf-8", body: new TextEncoder().encode("1") }],
]);
const CALL = JSON.stringify({ kind: "call", id: 1, method: "host.capabilities", args: {} });

let server: LoopbackServer;
let token = "";
let authority = "";
let calls = 0;

beforeAll(async () => {
  const host = createHost(
    fakeHandlers({
      "host.capabilities": async () => {
        calls += 1;
        return { fileDialogs: "inPage", version: "1", platform: "test" };
      },
    }),
    () => undefined,
  );
  server = await serveLoopback(host, UI);
  authority = new URL(server.origin).host;
  token = await redeem(server.address);
});
afterAll(() => server.close());

interface Reply {
  readonly status: number;
  readonly headers: ReadonlyMap<string, string>;
  readonly body: string;
}

/** Sends bytes as they stand, since a well-behaved client would not send most of what is tested here. */
function raw(text: string): Promise<Reply> {
  return new Promise((resolve, reject) => {
    const socket = connect({ host: "127.0.0.1", port: Number(new URL(server.origin).port) });
    let reply = "";
    socket.setEncoding("utf8");
    socket.on("data", (chunk: string) => {
      reply += chunk;
    });
    socket.on("error", reject);
    socket.on("close", () => {
      const [head = "", body = ""] = reply.split("\r\n\r\n", 2);
      const [first = "", ...lines] = head.split("\r\n");
      resolve({
        status: Number(first.split(" ")[1]),
        headers: new Map(lines.map((line) => [line.slice(0, line.indexOf(":")).toLowerCase(), line.slice(line.indexOf(":") + 1).trim()])),
        body,
      });
    });
    socket.write(text);
  });
}

interface RequestOpts {
  readonly method?: string;
  readonly path?: string;
  /** Header lines; null leaves out the one that is sent by default. */
  readonly headers?: Readonly<Record<string, string | null>>;
  readonly body?: string;
}

/** A request that is right in everything but what the test changes. */
function request({ method = "GET", path = "/", headers = {}, body = "" }: RequestOpts): Promise<Reply> {
  const post = method === "POST" ? { Origin: server.origin, Authorization: `Bearer ${token}`, "Content-Type": "application/json", "Content-Length": String(Buffer.byteLength(body)) } : {};
  const all: Record<string, string | null> = { Host: authority, ...post, Connection: "close", ...headers };
  const lines = Object.entries(all).flatMap(([name, value]) => (value === null ? [] : [`${name}: ${value}\r\n`]));
  return raw(`${method} ${path} HTTP/1.1\r\n${lines.join("")}\r\n${body}`);
}

const call = (headers: Readonly<Record<string, string | null>>): Promise<Reply> => request({ method: "POST", path: "/api/call", headers, body: CALL });

function expectAllHeaders(reply: Reply): void {
  for (const [name, value] of Object.entries(SECURITY_HEADERS)) expect(reply.headers.get(name.toLowerCase()), name).toBe(value);
  for (const name of reply.headers.keys()) expect(name).not.toMatch(/^access-control-|^set-cookie$|^x-powered-by$/);
}

describe("what our page may do", () => {
  test("the page and its files are there, by GET and by HEAD", async () => {
    const page = await request({});
    expect(page.status).toBe(200);
    expect(page.body).toBe(PAGE);
    expect(page.headers.get("content-type")).toBe("text/html; charset=utf-8");
    expectAllHeaders(page);
    const head = await request({ method: "HEAD" });
    expect([head.status, head.body, head.headers.get("content-length")]).toEqual([200, "", String(PAGE.length)]);
    expect((await request({ path: "/assets/a%20b.js?v=1" })).body).toBe("1");
  });

  test("a call with the token is answered", async () => {
    const before = calls;
    const reply = await call({});
    expect(reply.status).toBe(200);
    expect(reply.body).toContain('"version":"1"');
    expectAllHeaders(reply);
    expect(calls).toBe(before + 1);
  });

  test("the token is confirmed after a reload", async () => {
    expect((await request({ method: "POST", path: "/api/resume", body: "{}" })).body).toContain(token);
  });

  test("the policy has no unsafe word in it, and nothing from elsewhere", () => {
    const policy = SECURITY_HEADERS["Content-Security-Policy"] ?? "";
    expect(policy).toContain("default-src 'none'");
    expect(policy).toContain("frame-ancestors 'none'");
    expect(policy).not.toMatch(/unsafe|http|\*/);
  });
});

describe("what nobody else may do", () => {
  /** Every refusal has all headers, gives away nothing, and reaches no handler. */
  async function expectRefused(reply: Promise<Reply>, status: number): Promise<void> {
    const before = calls;
    const { body, ...rest } = await reply;
    expect(rest.status).toBe(status);
    expectAllHeaders({ body, ...rest });
    expect(body).not.toContain(token);
    expect(calls).toBe(before);
  }

  test.each(["evil.test:PORT", "localhost:PORT", "127.0.0.1.evil.test:PORT", "[::1]:PORT", "127.0.0.1", "127.0.0.1:1", "127.0.0.1:PORT0", "x@127.0.0.1:PORT", ""])(
    "a name that leads here is not ours: Host %j",
    async (pattern) => {
      const Host = pattern.replace("PORT", new URL(server.origin).port);
      await expectRefused(call({ Host }), 421);
      await expectRefused(request({ headers: { Host } }), 421);
    },
  );

  test("two Host headers, in either order", async () => {
    for (const [first, second] of [[authority, "evil.test"], ["evil.test", authority], [authority, authority]]) {
      await expectRefused(raw(`GET / HTTP/1.1\r\nHost: ${first}\r\nHost: ${second}\r\nConnection: close\r\n\r\n`), 421);
    }
  });

  test("no Host at all", async () => {
    await expectRefused(raw("GET / HTTP/1.0\r\n\r\n"), 421);
    await expectRefused(raw("GET / HTTP/1.1\r\nConnection: close\r\n\r\n"), 421);
  });

  test.each(["http://evil.test/", "//evil.test/", "*", "index.html"])("a target that is no path of ours: %j", async (path) => {
    const reply = await request({ path });
    expect([400, 421]).toContain(reply.status);
    expectAllHeaders(reply);
  });

  test.each(["null", "https://evil.test", "http://127.0.0.1:1", "http://localhost", "file://", ""])("another Origin: %j", async (origin) => {
    await expectRefused(call({ Origin: origin }), 403);
    await expectRefused(request({ headers: { Origin: origin } }), 403);
  });

  test("our Origin twice, or in a list", async () => {
    await expectRefused(call({ Origin: `${server.origin}\r\nOrigin: ${server.origin}` }), 403);
    await expectRefused(call({ Origin: `${server.origin}, ${server.origin}` }), 403);
  });

  test("a call without an Origin", async () => {
    await expectRefused(call({ Origin: null }), 403);
  });

  test.each(["same-site", "cross-site", "anything"])("a request from another page: Sec-Fetch-Site %s", async (site) => {
    await expectRefused(call({ "Sec-Fetch-Site": site }), 403);
    await expectRefused(request({ path: "/index.html", headers: { "Sec-Fetch-Site": site } }), 403);
    await expectRefused(request({ headers: { "Sec-Fetch-Site": site, "Sec-Fetch-Mode": "no-cors", "Sec-Fetch-Dest": "script" } }), 403);
    await expectRefused(request({ headers: { "Sec-Fetch-Site": site, "Sec-Fetch-Mode": "navigate", "Sec-Fetch-Dest": "iframe" } }), 403);
  });

  test("but going to the page from elsewhere is what the start page does", async () => {
    expect((await request({ headers: { "Sec-Fetch-Site": "cross-site", "Sec-Fetch-Mode": "navigate", "Sec-Fetch-Dest": "document" } })).status).toBe(200);
  });

  test.each([null, "", "Bearer", "Bearer x", "Basic eDp4", `bearer`])("a call with the authorization %j", async (authorization) => {
    await expectRefused(call({ Authorization: authorization }), 401);
  });

  test("a call with almost the token", async () => {
    const other = token.startsWith("A") ? "B" : "A";
    for (const wrong of [`${other}${token.slice(1)}`, token.slice(0, -1), `${token}A`]) await expectRefused(call({ Authorization: `Bearer ${wrong}` }), 401);
    await expectRefused(request({ method: "POST", path: "/api/events", headers: { Authorization: "Bearer x" }, body: "{}" }), 401);
    await expectRefused(request({ method: "POST", path: "/api/resume", headers: { Authorization: null }, body: "{}" }), 401);
  });

  test("the code works once, and no other code ever", async () => {
    const code = new URL(server.address).hash.slice(1);
    for (const wrong of [code, "", "x", null, 1, [code], {}]) {
      await expectRefused(request({ method: "POST", path: "/api/session", headers: { Authorization: null }, body: JSON.stringify({ code: wrong }) }), 403);
    }
    await expectRefused(request({ method: "POST", path: "/api/session", body: "null" }), 403);
  });

  test("more than a code takes, from whoever has no token", async () => {
    const body = JSON.stringify({ code: "x".repeat(2000) });
    await expectRefused(request({ method: "POST", path: "/api/session", headers: { Authorization: null }, body }), 413);
    const chunked = { Authorization: null, "Content-Length": null, "Transfer-Encoding": "chunked" };
    await expectRefused(request({ method: "POST", path: "/api/session", headers: chunked, body: `${body.length.toString(16)}\r\n${body}\r\n0\r\n\r\n` }), 413);
  });

  test.each(["/", "/api/call", "/api/session"])("OPTIONS %s, so that no other page's call gets past its browser", async (path) => {
    await expectRefused(request({ method: "OPTIONS", path, headers: { Origin: server.origin, "Access-Control-Request-Method": "POST" } }), 403);
    await expectRefused(request({ method: "OPTIONS", path, headers: { Origin: "https://evil.test", "Access-Control-Request-Method": "POST" } }), 403);
  });

  test.each(["PUT", "DELETE", "PATCH", "TRACE"])("%s", async (method) => {
    await expectRefused(request({ method }), 405);
  });

  test("a call by GET, which a link or a picture could make", async () => {
    for (const path of ["/api/call", "/api/session", "/api/events"]) await expectRefused(request({ path, headers: { Authorization: `Bearer ${token}` } }), 404);
  });

  test.each([
    "/..",
    "/../package.json",
    "/assets/../../package.json",
    "/%2e%2e/package.json",
    "/..%2fpackage.json",
    "/%2e%2e%2fpackage.json",
    "/..%5cpackage.json",
    "/etc/passwd",
    "/%2fetc%2fpasswd",
    "/index.html%00.js",
    "/%",
    "/%ff",
    "/assets/",
    "/assets",
    "/index.html/",
    "/constructor",
  ])("a file that is not in the list: %s", async (path) => {
    await expectRefused(request({ path }), 404);
  });

  test("a body that is too large, said beforehand or not", async () => {
    const limit = MAX_PROJECT_BYTES + 64 * 1024;
    await expectRefused(request({ method: "POST", path: "/api/call", headers: { "Content-Length": String(limit + 1) } }), 413);
    const response = await fetch(`${server.origin}/api/call`, {
      method: "POST",
      headers: { Origin: server.origin, Authorization: `Bearer ${token}`, "Content-Type": "application/json" },
      body: new ReadableStream({
        pull(controller) {
          controller.enqueue(new Uint8Array(1024 * 1024).fill(0x20));
        },
      }),
      duplex: "half",
    } as RequestInit).then(
      ({ status }) => status,
      // The server may cut the line while the client still sends.
      () => 413,
    );
    expect(response).toBe(413);
  });

  test.each(["text/plain", "application/x-www-form-urlencoded", "multipart/form-data", null])("a call of the type %j, which a form could send", async (type) => {
    await expectRefused(call({ "Content-Type": type }), 415);
  });

  test.each(["", "{", "[]", "null", '{"kind":"ok","id":1,"result":{}}', '{"kind":"call","id":-1,"method":"a","args":{}}', '{"kind":"call","id":1,"method":"host.capabilities","args":{},"more":1}'])("a body that is no call: %s", async (body) => {
    await expectRefused(request({ method: "POST", path: "/api/call", body }), 400);
  });

  test("a call to an unknown address", async () => {
    await expectRefused(request({ method: "POST", path: "/api/shutdown", body: "{}" }), 404);
    await expectRefused(request({ method: "POST", path: "/", body: "{}" }), 404);
  });

  test.each(["nonsense\r\n\r\n", "GET / HTTP/9.9\r\n\r\n", "GET / HTTP/1.1\r\nHost : x\r\n\r\n", `GET / HTTP/1.1\r\nX: ${"x".repeat(100_000)}\r\n\r\n`])("a request that is none", async (text) => {
    const reply = await raw(text);
    expect(reply.status).toBeGreaterThanOrEqual(400);
    expectAllHeaders(reply);
  });

  test("a length and a chunked body together, which hides a second request", async () => {
    const reply = await request({ method: "POST", path: "/api/call", headers: { "Transfer-Encoding": "chunked" }, body: "0\r\n\r\n" });
    expect(reply.status).toBe(400);
    expectAllHeaders(reply);
  });

  test("a request that expects something", async () => {
    await expectRefused(request({ headers: { Expect: "the-unexpected" } }), 417);
  });

  test("a change to another protocol", async () => {
    const reply = await request({ headers: { Connection: "Upgrade", Upgrade: "websocket", "Sec-WebSocket-Key": "AAAAAAAAAAAAAAAAAAAAAA==", "Sec-WebSocket-Version": "13", Origin: "https://evil.test" } });
    expect(reply.status).not.toBe(101);
    expect(reply.body).not.toContain(token);
  });

  test("anybody by another of this machine's addresses", async () => {
    const port = Number(new URL(server.origin).port);
    const addresses = Object.values(networkInterfaces()).flatMap((list) => (list ?? []).filter(({ internal }) => !internal).map(({ address }) => address));
    for (const host of ["::1", ...addresses]) {
      const outcome = await new Promise<string>((resolve) => {
        const socket = connect({ host, port }, () => resolve("connected"));
        socket.on("error", () => resolve("refused"));
      });
      expect(outcome, host).toBe("refused");
    }
  });
});

test("two sessions have different secrets", async () => {
  const other = await serveLoopback(createHost(fakeHandlers(), () => undefined), UI);
  expect(new URL(other.address).hash).not.toBe(new URL(server.address).hash);
  expect(await redeem(other.address)).not.toBe(token);
  await other.close();
});
