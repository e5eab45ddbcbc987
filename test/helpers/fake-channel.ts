import type { Channel } from "../../core/contract/envelope.ts";
import type { Host } from "../../app/host.ts";

/** A channel within one process; messages are copied as they would be on the way between two. */
export interface FakeChannel extends Channel {
  /** Ends the connection, as if the host had gone. */
  disconnect(): void;
}

/** Joins a client straight to a host. */
export function createFakeChannel(host: Host): FakeChannel {
  return createScriptedChannel(async (message, reply) => {
    const answer = await host.answer(message);
    if (answer !== null) reply(answer);
  }, host);
}

/** A channel whose other end is the given function: for hosts that misbehave. */
export function createScriptedChannel(receive: (message: unknown, reply: (message: unknown) => void) => void | Promise<void>, host?: Host): FakeChannel {
  let onMessage: ((message: unknown) => void) | undefined;
  let onClose: (() => void) | undefined;
  let isOpen = true;
  const deliver = (message: unknown): void => {
    if (isOpen) onMessage?.(structuredClone(message));
  };
  const stop = host?.onEvent(deliver);
  return {
    post(message) {
      const copy: unknown = structuredClone(message);
      if (isOpen) void receive(copy, deliver);
    },
    onMessage(listener) {
      onMessage = listener;
    },
    onClose(listener) {
      onClose = listener;
    },
    disconnect() {
      isOpen = false;
      stop?.();
      onClose?.();
    },
  };
}
