import type { HostBridge } from "../core/contract/envelope.ts";
import { APP_ORIGIN } from "./app-protocol.ts";
import type { Host } from "./host.ts";

const TO_HOST = "bandwright:to-host";
const TO_PAGE = "bandwright:to-page";

/** What this carrier needs of the window's process. */
export interface IpcSender {
  readonly mainFrame: object;
  send(channel: string, message: unknown): void;
  isDestroyed(): boolean;
}

export interface IpcEvent {
  readonly sender: IpcSender;
  /** Null when the frame has gone or moved on since it sent the message. */
  readonly senderFrame: { readonly origin: string } | null;
}

export interface IpcReceiver {
  on(channel: string, listener: (event: IpcEvent, message: unknown) => void): unknown;
}

/** What the preload needs of its side. */
export interface IpcPort {
  send(channel: string, message: unknown): void;
  on(channel: string, listener: (event: unknown, message: unknown) => void): unknown;
}

/** Whether a message comes from our own page: from the window we made, its top frame, our origin. */
export function isTrustedSender(event: IpcEvent, page: IpcSender | null): boolean {
  return page !== null && event.sender === page && event.senderFrame !== null && event.senderFrame === event.sender.mainFrame && event.senderFrame.origin === APP_ORIGIN;
}

/** Joins the host to the page that `getPage` names at the moment; anybody else's messages are dropped. */
export function carryOverIpc(host: Host, receiver: IpcReceiver, getPage: () => IpcSender | null): void {
  receiver.on(TO_HOST, (event, message) => {
    if (!isTrustedSender(event, getPage())) return;
    void answerTo(event.sender, message);
  });

  async function answerTo(sender: IpcSender, message: unknown): Promise<void> {
    const answer = await host.answer(message);
    if (answer !== null && !sender.isDestroyed()) sender.send(TO_PAGE, answer);
  }

  host.onEvent((message) => {
    const page = getPage();
    if (page !== null && !page.isDestroyed()) page.send(TO_PAGE, message);
  });
}

/** The page's end: two functions, with neither the port nor its events let through. */
export function createBridge(port: IpcPort): HostBridge {
  return {
    post: (message) => port.send(TO_HOST, message),
    onMessage: (listener) => {
      port.on(TO_PAGE, (_event, message) => listener(message));
    },
  };
}
