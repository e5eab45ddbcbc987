import { memo, useRef, type KeyboardEvent } from "react";
import { travelText } from "./figure-texts.ts";

export interface KnobActions {
  onKnobStart(id: string): void;
  onKnobMove(id: string, position: number): void;
  onKnobEnd(): void;
  onKnobCancel(): void;
  onPick(id: string): void;
  onReveal(id: string): void;
}

interface KnobProxyProps {
  readonly id: string;
  readonly label: string;
  readonly position: number;
  /** `+5.2 dB`, or empty where nothing is computed. */
  readonly now: string;
  readonly left: number;
  readonly top: number;
  readonly width: number;
  readonly height: number;
  readonly isSelected: boolean;
  /** What is wrong with its figures, in words; empty where nothing is. */
  readonly caution: string;
  readonly actions: KnobActions;
}

const STEP = 0.01;
const BIG_STEP = 0.1;

function to(value: number): number {
  return Math.max(0, Math.min(1, Math.round(value * 1e4) / 1e4));
}

/** Where a key takes a slider; null for keys that are not its own. */
function keyedPosition(key: string, isShift: boolean, position: number): number | null {
  const step = isShift ? BIG_STEP : STEP;
  switch (key) {
    case "ArrowUp":
    case "ArrowRight":
      return to(position + step);
    case "ArrowDown":
    case "ArrowLeft":
      return to(position - step);
    case "PageUp":
      return to(position + BIG_STEP);
    case "PageDown":
      return to(position - BIG_STEP);
    case "Home":
      return 0;
    case "End":
      return 1;
    case "0":
      return 0.5;
    default:
      return null;
  }
}

/** The slider of a band for keyboards and screen readers: it lies over the drawn knob and shows its focus. */
export const KnobProxy = memo(function KnobProxy({ id, label, position, now, left, top, width, height, isSelected, caution, actions }: KnobProxyProps) {
  const isMoving = useRef(false);
  const end = (): void => {
    if (!isMoving.current) return;
    isMoving.current = false;
    actions.onKnobEnd();
  };
  const onKeyDown = (event: KeyboardEvent): void => {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    if (event.key === "Enter") {
      event.stopPropagation();
      actions.onPick(id);
      return;
    }
    if (event.key === "Escape" && isMoving.current) {
      event.stopPropagation();
      isMoving.current = false;
      actions.onKnobCancel();
      return;
    }
    const next = keyedPosition(event.key, event.shiftKey, position);
    if (next === null) return;
    event.preventDefault();
    event.stopPropagation();
    // A key held down is one gesture: it ends when the key comes up.
    if (!isMoving.current) {
      isMoving.current = true;
      actions.onKnobStart(id);
    }
    actions.onKnobMove(id, next);
  };
  return (
    <div
      className="sheet-proxy is-knob"
      role="slider"
      tabIndex={0}
      data-band={id}
      aria-label={[label, ...(isSelected ? ["selected"] : []), ...(caution === "" ? [] : [caution])].join(", ")}
      aria-orientation="vertical"
      aria-valuemin={0}
      aria-valuemax={100}
      aria-valuenow={Math.round(position * 1000) / 10}
      aria-valuetext={now === "" ? travelText(position) : `${now}, ${travelText(position)}`}
      style={{ left, top, width, height }}
      onKeyDown={onKeyDown}
      onKeyUp={end}
      onBlur={end}
      onFocus={() => actions.onReveal(id)}
    />
  );
});
