import { useState, type KeyboardEvent } from "react";

/** A list's row in hand. */
export interface ListPlace {
  readonly index: number;
  readonly setIndex: (index: number) => void;
}

/** The row in hand of a list that is not itself made of focusable things. */
export function useListPlace(): ListPlace {
  const [index, setIndex] = useState(0);
  return { index, setIndex };
}

/** Up, down, Home, End and the page keys walk through the list, Enter chooses. */
export function walkList(event: KeyboardEvent, place: ListPlace, count: number, onEnter: (index: number) => void): void {
  const { index } = place;
  const to: Readonly<Record<string, number>> = { ArrowDown: index + 1, ArrowUp: index - 1, PageDown: index + 8, PageUp: index - 8, Home: 0, End: count - 1 };
  if (event.key === "Enter" && count > 0) onEnter(index);
  else if (Object.hasOwn(to, event.key) && !event.shiftKey && !event.ctrlKey && !event.metaKey) place.setIndex(Math.max(0, Math.min(count - 1, to[event.key])));
  else return;
  event.preventDefault();
  event.stopPropagation();
}
