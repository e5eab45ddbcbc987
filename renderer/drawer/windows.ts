import type { DrawerLine } from "../../core/contract/drawer-schemas.ts";

/** Lines asked for at a time. */
export const WINDOW = 200;
/** Windows kept: enough that scrolling back shows what was just seen. */
const MOST_KEPT = 40;

/** Gives a part of the list, with the length of all of it. */
export type WindowFetch = (offset: number, limit: number) => Promise<WindowAnswer>;

export interface WindowAnswer {
  readonly total: number;
  readonly lines: readonly DrawerLine[];
}

/**
 * The lines of a long list, fetched in windows as they come into sight. After a change the old lines stay on the screen
 * until the new ones are there.
 */
export class LineWindows {
  readonly #fetch: WindowFetch;
  readonly #onChange: () => void;
  readonly #onFail: (error: unknown) => void;
  readonly #windows = new Map<number, readonly DrawerLine[]>();
  readonly #fresh = new Set<number>();
  readonly #asked = new Set<number>();
  #total: number | null = null;
  #generation = 0;
  #isOther = false;

  constructor(fetch: WindowFetch, onChange: () => void, onFail: (error: unknown) => void) {
    this.#fetch = fetch;
    this.#onChange = onChange;
    this.#onFail = onFail;
  }

  /** How many lines there are; null before the first answer. */
  get total(): number | null {
    return this.#total;
  }

  /** The line at a place, undefined while it is on its way. */
  at(index: number): DrawerLine | undefined {
    return this.#windows.get(Math.floor(index / WINDOW))?.[index % WINDOW];
  }

  /** Sees to it that a range of places is there, or will be. */
  want(from: number, to: number): void {
    const first = Math.max(0, Math.floor(from / WINDOW));
    const end = this.#total === null || this.#isOther ? to : Math.min(to, this.#total - 1);
    const last = Math.max(first, Math.floor(Math.max(0, end) / WINDOW));
    for (let window = first; window <= last; window++) if (!this.#fresh.has(window) && !this.#asked.has(window)) void this.#ask(window);
  }

  /** Another list: what is held stays on the screen until the first of it is there, so that typing a filter does not flicker. */
  restart(): void {
    this.#isOther = true;
    this.refresh();
  }

  /** The same list may have changed: whatever is wanted next is asked for again. */
  refresh(): void {
    this.#generation++;
    this.#fresh.clear();
    this.#asked.clear();
  }

  async #ask(window: number): Promise<void> {
    const generation = this.#generation;
    this.#asked.add(window);
    try {
      const answer = await this.#fetch(window * WINDOW, WINDOW);
      if (generation !== this.#generation) return;
      if (this.#isOther) this.#windows.clear();
      this.#isOther = false;
      this.#windows.delete(window);
      this.#windows.set(window, answer.lines);
      this.#fresh.add(window);
      this.#total = answer.total;
      for (const old of this.#windows.keys()) {
        if (this.#windows.size <= MOST_KEPT) break;
        this.#windows.delete(old);
        this.#fresh.delete(old);
      }
      this.#onChange();
    } catch (error) {
      if (generation === this.#generation) this.#onFail(error);
    } finally {
      if (generation === this.#generation) this.#asked.delete(window);
    }
  }
}
