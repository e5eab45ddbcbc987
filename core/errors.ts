/**
 * One thing wrong with a file or a board, told so that a person can mend it.
 * `path` is a JSON path inside the project file ("" for the file as a whole), `blocks` the blocks concerned.
 */
export interface Fault {
  readonly path: string;
  readonly message: string;
  readonly blocks?: readonly string[];
}

/** `blocks[3].parts.seriesC.value: must be …`, or the message alone where there is no path. */
export function faultText(fault: Fault): string {
  return fault.path === "" ? fault.message : `${fault.path}: ${fault.message}`;
}

/** Thrown where bad input meets code that cannot go on; carries every fault found, not only the first. */
export class FaultError extends Error {
  override readonly name = "FaultError";
  readonly faults: readonly Fault[];
  constructor(faults: readonly Fault[]) {
    super(faults.map(faultText).join("\n"));
    this.faults = faults;
  }
}
