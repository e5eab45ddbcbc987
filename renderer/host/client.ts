import * as v from "valibot";
import { HOST_MESSAGE_SCHEMA, type Channel } from "../../core/contract/envelope.ts";
import { HostFailure, type Failure } from "../../core/contract/failures.ts";
import { checkEvent, checkResult, isEventName, type ArgsOf, type EventData, type EventName, type MethodName, type ResultOf } from "../../core/contract/methods.ts";

/** Methods without arguments are called by their name alone. */
type CallArgs<M extends MethodName> = Record<string, never> extends ArgsOf<M> ? [args?: ArgsOf<M>] : [args: ArgsOf<M>];

/** The machine as the screens see it; which carrier is underneath, they cannot tell. */
export interface HostClient {
  /** Resolves with the checked result, rejects with a `HostFailure`. */
  call<M extends MethodName>(method: M, ...args: CallArgs<M>): Promise<ResultOf<M>>;
  /** Listens to an event; returns the function that stops listening. */
  on<E extends EventName>(event: E, listener: (data: EventData<E>) => void): () => void;
  /** Called once when the connection has ended (at once, if it already has). */
  onClose(listener: () => void): void;
}

interface Pending {
  readonly method: MethodName;
  readonly resolve: (result: unknown) => void;
  readonly reject: (failure: HostFailure) => void;
}

/** Builds the client on one end of a channel. */
export function createHostClient(channel: Channel): HostClient {
  const pending = new Map<number, Pending>();
  const listeners = new Map<EventName, Set<(data: never) => void>>();
  const closeListeners: (() => void)[] = [];
  let nextId = 0;
  let isClosed = false;

  channel.onMessage((raw) => {
    const parsed = v.safeParse(HOST_MESSAGE_SCHEMA, raw);
    // A message that is not ours cannot be matched to a call: there is nobody to tell.
    if (!parsed.success) return;
    const message = parsed.output;
    if (message.kind === "event") {
      emit(message.name, message.data);
      return;
    }
    const call = pending.get(message.id);
    if (call === undefined) return;
    pending.delete(message.id);
    if (message.kind === "fail") {
      call.reject(revive(message.failure));
      return;
    }
    const checked = checkResult(call.method, message.result);
    if (checked.ok) call.resolve(checked.value);
    else call.reject(new HostFailure("bad-result", { method: call.method, problems: checked.problems }));
  });

  channel.onClose(() => {
    if (isClosed) return;
    isClosed = true;
    for (const call of pending.values()) call.reject(new HostFailure("closed", {}));
    pending.clear();
    for (const listener of closeListeners.splice(0)) listener();
  });

  function emit(name: string, data: unknown): void {
    if (!isEventName(name)) return;
    const checked = checkEvent(name, data);
    if (!checked.ok) return;
    // The map's key is the event's name, so that its listeners take just this data.
    for (const listener of listeners.get(name) ?? []) listener(checked.value as never);
  }

  return {
    call<M extends MethodName>(method: M, ...args: CallArgs<M>): Promise<ResultOf<M>> {
      if (isClosed) return Promise.reject(new HostFailure("closed", {}));
      const id = nextId++;
      return new Promise<ResultOf<M>>((resolve, reject) => {
        pending.set(id, { method, resolve: resolve as (result: unknown) => void, reject });
        try {
          channel.post({ kind: "call", id, method, args: args[0] ?? {} });
        } catch (error) {
          // Something in the arguments that cannot travel, such as a function.
          pending.delete(id);
          reject(new HostFailure("bad-call", { method, problems: [error instanceof Error ? error.message : String(error)] }));
        }
      });
    },
    on(event, listener) {
      const set = listeners.get(event) ?? new Set<(data: never) => void>();
      listeners.set(event, set);
      set.add(listener);
      return () => {
        set.delete(listener);
      };
    },
    onClose(listener) {
      if (isClosed) listener();
      else closeListeners.push(listener);
    },
  };
}

function revive(failure: Failure): HostFailure {
  return new HostFailure(failure.code, failure.data);
}
