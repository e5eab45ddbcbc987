import { useEffect, useLayoutEffect, useState, type RefObject } from "react";
import { FONT } from "./tokens.ts";

export interface Size {
  readonly width: number;
  readonly height: number;
}

/** The size of an element in whole CSS pixels, followed as it changes; null before it is known. */
export function useSize(ref: RefObject<HTMLElement | null>): Size | null {
  const [size, setSize] = useState<Size | null>(null);
  useLayoutEffect(() => {
    const element = ref.current;
    if (!element) return undefined;
    const read = (): void => {
      const next = { width: Math.round(element.clientWidth), height: Math.round(element.clientHeight) };
      setSize((last) => (last?.width === next.width && last.height === next.height ? last : next));
    };
    read();
    const observer = new ResizeObserver(read);
    observer.observe(element);
    return () => observer.disconnect();
  }, [ref]);
  return size;
}

/** Device pixels a CSS pixel, followed when the window goes to another screen or the page is zoomed. */
export function usePixelRatio(): number {
  const [ratio, setRatio] = useState(() => window.devicePixelRatio || 1);
  useEffect(() => {
    if (typeof window.matchMedia !== "function") return undefined;
    const query = window.matchMedia(`(resolution: ${ratio}dppx)`);
    const change = (): void => setRatio(window.devicePixelRatio || 1);
    query.addEventListener("change", change);
    return () => query.removeEventListener("change", change);
  }, [ratio]);
  return ratio;
}

/** How long a drawing waits for its type, ms: a missing font must not keep the sheet empty. */
const FONT_PATIENCE = 1500;

/** Whether the packaged type is there: a canvas does not redraw by itself when a font arrives. */
export function useFontsReady(): boolean {
  const [isReady, setReady] = useState(() => document.fonts === undefined);
  useEffect(() => {
    if (isReady) return undefined;
    let isGone = false;
    const done = (): void => {
      if (!isGone) setReady(true);
    };
    const timer = setTimeout(done, FONT_PATIENCE);
    // Each weight that the sheet sets, with letters beyond Latin that values need.
    const load = async (): Promise<void> => {
      const wanted = [400, 600].map((weight) => document.fonts.load(`${weight} 12px ${FONT}`, "AΩµ±−"));
      await Promise.allSettled(wanted);
      done();
    };
    void load();
    return () => {
      isGone = true;
      clearTimeout(timer);
    };
  }, [isReady]);
  return isReady;
}
