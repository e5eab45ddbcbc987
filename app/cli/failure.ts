/** Exit codes of every command. */
export const EXIT = { done: 0, failed: 1, badInput: 2 } as const;

/** Ends a command with a message on stderr and an exit code; anything else that is thrown is a fault of ours. */
export class CommandFailure extends Error {
  override readonly name = "CommandFailure";
  readonly exitCode: number;
  constructor(message: string, exitCode: number = EXIT.badInput) {
    super(message);
    this.exitCode = exitCode;
  }
}
