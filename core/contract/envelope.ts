import * as v from "valibot";
import { isFailure, type Failure } from "./failures.ts";

const ID = v.pipe(v.number(), v.safeInteger(), v.minValue(0));

export const CALL_SCHEMA = v.strictObject({ kind: v.literal("call"), id: ID, method: v.string(), args: v.unknown() });

const OK_SCHEMA = v.strictObject({ kind: v.literal("ok"), id: ID, result: v.unknown() });
const FAIL_SCHEMA = v.strictObject({ kind: v.literal("fail"), id: ID, failure: v.custom<Failure>(isFailure) });
const EVENT_SCHEMA = v.strictObject({ kind: v.literal("event"), name: v.string(), data: v.unknown() });

/** Everything a host sends; a call is all that it receives. */
export const HOST_MESSAGE_SCHEMA = v.variant("kind", [OK_SCHEMA, FAIL_SCHEMA, EVENT_SCHEMA]);

export type Call = v.InferOutput<typeof CALL_SCHEMA>;
export type Ok = v.InferOutput<typeof OK_SCHEMA>;
export type Fail = v.InferOutput<typeof FAIL_SCHEMA>;
export type EventMessage = v.InferOutput<typeof EVENT_SCHEMA>;
export type Answer = Ok | Fail;

/**
 * One end of a connection. A carrier is nothing but this; what arrives on it is validated by whoever listens.
 * `onMessage` and `onClose` take one listener each. After `onClose` has fired nothing more arrives.
 */
export interface Channel {
  post(message: unknown): void;
  onMessage(listener: (message: unknown) => void): void;
  onClose(listener: () => void): void;
}

/** What the preload hands to the page in the desktop window: plain functions, no Electron object among them. */
export interface HostBridge {
  post(message: unknown): void;
  onMessage(listener: (message: unknown) => void): void;
}
