import * as v from "valibot";
import { CALL_SCHEMA, type Answer, type Call, type EventMessage } from "../core/contract/envelope.ts";
import { HostFailure, type Failure } from "../core/contract/failures.ts";
import { checkArgs, checkEvent, checkResult, isMethodName, METHODS, type ArgsOf, type EventData, type EventName, type MethodName, type ResultOf } from "../core/contract/methods.ts";

/** One handler a method; `HostFailure` is the way to fail. */
export type Handlers = { readonly [M in MethodName]: (args: ArgsOf<M>) => Promise<ResultOf<M>> };

/** The machine's side of the contract, whichever carrier brings the calls. */
export interface Host {
  /** Checks the call, runs it, checks the result. Never rejects; null for something that is no call at all. */
  answer(message: unknown): Promise<Answer | null>;
  emit<E extends EventName>(name: E, data: EventData<E>): void;
  /** Each carrier forwards events to its screens; returns the function that stops it. */
  onEvent(listener: (message: EventMessage) => void): () => void;
  /** Refuses further calls, and resolves once the running mutating calls are done. */
  close(): Promise<void>;
}

/** Builds the host over the services' handlers. `report` hears of errors nobody foresaw. */
export function createHost(handlers: Handlers, report: (error: unknown) => void): Host {
  const listeners = new Set<(message: EventMessage) => void>();
  let lastMutation: Promise<unknown> = Promise.resolve();
  let isClosed = false;

  async function run<M extends MethodName>(name: M, rawArgs: unknown): Promise<ResultOf<M>> {
    const args = checkArgs(name, rawArgs);
    if (!args.ok) throw new HostFailure("bad-call", { method: name, problems: args.problems });
    const result = checkResult(name, await handlers[name](args.value));
    if (!result.ok) throw new HostFailure("bad-result", { method: name, problems: result.problems });
    return result.value;
  }

  /** Mutating calls wait for the one before, whether that went well or not. */
  function inOrder<T>(work: () => Promise<T>): Promise<T> {
    const next = lastMutation.then(work);
    lastMutation = next.catch(() => undefined);
    return next;
  }

  async function perform(call: Call): Promise<Answer> {
    const { id, method } = call;
    try {
      if (isClosed) throw new HostFailure("closed", {});
      if (!isMethodName(method)) throw new HostFailure("bad-call", { method, problems: ["there is no such method"] });
      const work = (): Promise<unknown> => run(method, call.args);
      return { kind: "ok", id, result: await (METHODS[method].mutates ? inOrder(work) : work()) };
    } catch (error) {
      return { kind: "fail", id, failure: toFailure(error, report) };
    }
  }

  return {
    async answer(message) {
      const call = v.safeParse(CALL_SCHEMA, message);
      return call.success ? perform(call.output) : null;
    },
    emit(name, data) {
      const checked = checkEvent(name, data);
      if (!checked.ok) throw new Error(`event ${name}: ${checked.problems.join("; ")}`);
      for (const listener of listeners) listener({ kind: "event", name, data: checked.value });
    },
    onEvent(listener) {
      listeners.add(listener);
      return () => {
        listeners.delete(listener);
      };
    },
    async close() {
      isClosed = true;
      await lastMutation;
    },
  };
}

function toFailure(error: unknown, report: (error: unknown) => void): Failure {
  if (error instanceof HostFailure) return error.toFailure();
  report(error);
  return new HostFailure("internal", { detail: error instanceof Error ? error.message : String(error) }).toFailure();
}
