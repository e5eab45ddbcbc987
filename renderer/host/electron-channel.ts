import type { Channel, HostBridge } from "../../core/contract/envelope.ts";

declare global {
  interface Window {
    /** Put there by the desktop window's preload; absent in a browser. */
    readonly bandwrightHost?: HostBridge;
  }
}

/** The desktop window's channel. It never closes before the page itself does. */
export function createElectronChannel(bridge: HostBridge): Channel {
  return {
    post: (message) => bridge.post(message),
    onMessage: (listener) => bridge.onMessage(listener),
    onClose: () => undefined,
  };
}
