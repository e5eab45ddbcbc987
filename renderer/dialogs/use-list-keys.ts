import { useState, type KeyboardEvent } from "react";

export interface ListKeys {
  readonly index: number;
  setIndex(index: number): void;
  onKeyDown(event: KeyboardEvent): void;
}

/** Up, down, Home, End and the page keys through a list that is not itself made of focusable things. */
export function useListKeys(count: number, onEnter: (index: number) => void): ListKeys {
  const [wish, setIndex] = useState(0);
  const index = Math.max(0, Math.min(wish, count - 1));
  return {
    index,
    setIndex,
    onKeyDown(event) {
      const to: Record<string, number> = { ArrowDown: index + 1, ArrowUp: index - 1, PageDown: index + 8, PageUp: index - 8, Home: 0, End: count - 1 };
      if (event.key === "Enter" && count > 0) onEnter(index);
      else if (event.key in to && !event.shiftKey && !event.ctrlKey && !event.metaKey) setIndex(Math.max(0, Math.min(count - 1, to[event.key]!)));
      else return;
      event.preventDefault();
      event.stopPropagation();
    },
  };
}
