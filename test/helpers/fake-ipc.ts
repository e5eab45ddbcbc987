import type { IpcEvent, IpcPort, IpcReceiver, IpcSender } from "../../app/ipc-carrier.ts";
import { APP_ORIGIN } from "../../app/app-protocol.ts";

/** Both ends of the desktop window's message passing, with no window. Messages are copied and come later, as they do there. */
export interface FakeIpc {
  readonly receiver: IpcReceiver;
  readonly port: IpcPort;
  readonly page: IpcSender;
  /** Delivers a message to the main process as if it came from elsewhere. */
  inject(channel: string, message: unknown, event: Partial<IpcEvent>): void;
  /** What the page's end has got so far. */
  readonly received: readonly unknown[];
  /** Every channel name that the page's end has sent on. */
  readonly channels: ReadonlySet<string>;
}

/** Builds the pair. */
export function createFakeIpc(): FakeIpc {
  const toMain = new Map<string, (event: IpcEvent, message: unknown) => void>();
  const toPage = new Map<string, (event: unknown, message: unknown) => void>();
  const received: unknown[] = [];
  const channels = new Set<string>();
  const mainFrame = { origin: APP_ORIGIN };
  const page: IpcSender = {
    mainFrame,
    isDestroyed: () => false,
    send(channel, message) {
      const copy: unknown = structuredClone(message);
      queueMicrotask(() => {
        received.push(copy);
        toPage.get(channel)?.({ sender: "not for the page" }, copy);
      });
    },
  };
  return {
    page,
    received,
    channels,
    receiver: { on: (channel, listener) => toMain.set(channel, listener) },
    port: {
      on: (channel, listener) => toPage.set(channel, listener),
      send(channel, message) {
        channels.add(channel);
        const copy: unknown = structuredClone(message);
        queueMicrotask(() => toMain.get(channel)?.({ sender: page, senderFrame: mainFrame }, copy));
      },
    },
    inject(channel, message, event) {
      toMain.get(channel)?.({ sender: page, senderFrame: mainFrame, ...event }, message);
    },
  };
}
