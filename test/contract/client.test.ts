import { describe, expect, test } from "vitest";
import { createHostClient } from "../../renderer/host/client.ts";
import { createScriptedChannel } from "../helpers/fake-channel.ts";

interface Sent {
  readonly id: number;
  readonly method: string;
}

describe("the client, at a host that misbehaves", () => {
  test("does not pass on a result that breaks the table", async () => {
    const client = createHostClient(createScriptedChannel((message, reply) => reply({ kind: "ok", id: (message as Sent).id, result: { path: 3 } })));
    await expect(client.call("project.launch")).rejects.toMatchObject({ code: "bad-result", data: { problems: [expect.stringContaining("path")] } });
  });

  test("answers may come in any order", async () => {
    const held: Sent[] = [];
    const client = createHostClient(
      createScriptedChannel((message, reply) => {
        held.push(message as Sent);
        if (held.length < 3) return;
        for (const { id } of held.toReversed()) reply({ kind: "ok", id, result: { path: `/${id}` } });
      }),
    );
    const answers = await Promise.all([client.call("project.launch"), client.call("project.launch"), client.call("project.launch")]);
    expect(answers.map(({ path }) => path)).toEqual(held.map(({ id }) => `/${id}`));
  });

  test.each([
    ["no message at all", "hello"],
    ["an answer to nothing", { kind: "ok", id: 999, result: { path: null } }],
    ["a failure of no known code", { kind: "fail", id: 0, failure: { code: "mood", data: {} } }],
    ["a failure without its data", { kind: "fail", id: 0, failure: { code: "file-not-found", data: {} } }],
    ["an event of no known name", { kind: "event", name: "constructor", data: {} }],
    ["an event with the wrong data", { kind: "event", name: "project.openRequested", data: { path: 1 } }],
  ])("%s changes nothing", async (_what, noise) => {
    const heard: unknown[] = [];
    const client = createHostClient(
      createScriptedChannel((message, reply) => {
        reply(noise);
        reply({ kind: "ok", id: (message as Sent).id, result: { path: "/fine" } });
      }),
    );
    client.on("project.openRequested", (data) => heard.push(data));
    expect(await client.call("project.launch")).toEqual({ path: "/fine" });
    expect(heard).toEqual([]);
  });
});
