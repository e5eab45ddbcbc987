import { memo, useMemo, type KeyboardEvent } from "react";
import { useStore } from "zustand";
import { knobY } from "../../core/geometry/band-place.ts";
import type { SheetLayout } from "../../core/geometry/layout.ts";
import { readCurve } from "../../core/geometry/reading.ts";
import { BLOCKS } from "../../core/blocks/index.ts";
import type { Block } from "../../core/model/project.ts";
import { formatDb, formatFigure } from "../../core/units.ts";
import { KnobProxy, type KnobActions } from "./KnobProxy.tsx";
import { degreesText, NO_END_VOID, voidEndsOf, voidEndsText } from "./figure-texts.ts";
import type { OverlayStore } from "./overlay-store.ts";
import type { SheetProps, SheetResults } from "./sheet-props.ts";

interface SheetProxiesProps {
  readonly layout: SheetLayout;
  readonly blocks: ReadonlyMap<string, Block>;
  readonly results: SheetResults | null;
  readonly selection: readonly string[];
  readonly isVoid: boolean;
  readonly unstableEnds: NonNullable<SheetProps["unstableEnds"]>;
  readonly actions: KnobActions;
  readonly overlay: OverlayStore;
  readonly onCursorAt: (frequency: number | null) => void;
}

/** What of the drawing can be reached by keyboard: the response, the blocks of the chain, every knob from left to right. */
export function SheetProxies({ layout, blocks, results, selection, isVoid, unstableEnds, actions, overlay, onCursorAt }: SheetProxiesProps) {
  const { board, ruling } = layout.frame;
  const voidEnds = useMemo(() => voidEndsOf(unstableEnds), [unstableEnds]);
  const bands = useMemo(() => layout.bands.toSorted((a, b) => a.rail - b.rail || a.x - b.x), [layout]);
  return (
    <>
      <ResponseProxy layout={layout} results={results} isVoid={isVoid} overlay={overlay} onCursorAt={onCursorAt} />
      <div className="sheet-proxies" style={{ top: board.top }}>
        {layout.chain.map((place) => (
          <ChainProxy
            key={place.id} id={place.id} label={place.block.label ?? BLOCKS[place.block.kind].label} isSelected={selection.includes(place.id)} actions={actions}
            left={place.box.left} top={place.box.top - board.top} width={place.box.right - place.box.left} height={place.box.bottom - place.box.top}
          />
        ))}
      </div>
      <div className="sheet-proxies" style={{ top: board.top, left: ruling.left, right: layout.frame.width - ruling.right }}>
        {bands.map((place) => {
          const block = blocks.get(place.id);
          if (!block) return null;
          const position = block.slider?.position ?? 0.5;
          const now = results?.liveGain.get(place.id);
          return (
            <KnobProxy
              key={place.id} id={place.id} label={block.label ?? block.id} position={position} now={now === undefined ? "" : isVoid ? "unstable" : formatDb(now)}
              left={place.x - place.knobHalf - 2 - ruling.left} top={knobY(place, position) - 9 - board.top} width={place.knobHalf * 2 + 4} height={18}
              isSelected={selection.includes(place.id)} caution={voidEndsText(voidEnds.get(place.id) ?? NO_END_VOID)} actions={actions}
            />
          );
        })}
      </div>
    </>
  );
}

interface ChainProxyProps {
  readonly id: string;
  readonly label: string;
  readonly isSelected: boolean;
  readonly actions: KnobActions;
  readonly left: number;
  readonly top: number;
  readonly width: number;
  readonly height: number;
}

const ChainProxy = memo(function ChainProxy({ id, label, isSelected, actions, left, top, width, height }: ChainProxyProps) {
  return (
    <div
      className="sheet-proxy"
      role="button"
      tabIndex={0}
      data-block={id}
      aria-label={label}
      aria-pressed={isSelected}
      style={{ left, top, width, height }}
      onFocus={() => actions.onReveal(id)}
      onKeyDown={(event) => {
        if (event.key !== "Enter" && event.key !== " ") return;
        event.preventDefault();
        event.stopPropagation();
        actions.onPick(id);
      }}
    />
  );
});

interface ResponseProxyProps {
  readonly layout: SheetLayout;
  readonly results: SheetResults | null;
  readonly isVoid: boolean;
  readonly overlay: OverlayStore;
  readonly onCursorAt: (frequency: number | null) => void;
}

/** The response as a slider over frequency: the cursor for hands that use keys. */
function ResponseProxy({ layout, results, isVoid, overlay, onCursorAt }: ResponseProxyProps) {
  const { response, ruling } = layout.frame;
  const cursor = useStore(overlay, (state) => state.cursor);
  if (!results) return null;
  const { frequency } = results.total;
  const [first, last] = [frequency[0], frequency[frequency.length - 1]];
  const at = Math.max(first, Math.min(last, cursor ?? 1000));
  const reading = readCurve(results.total, at);
  const onKeyDown = (event: KeyboardEvent): void => {
    const factor = CURSOR_STEPS[event.key];
    const next = event.key === "Home" ? Math.max(first, ruling.from) : event.key === "End" ? Math.min(last, ruling.to) : factor === undefined ? null : at * factor ** (event.shiftKey ? 8 : 1);
    if (next === null) return;
    event.preventDefault();
    event.stopPropagation();
    onCursorAt(Math.max(first, Math.min(last, next)));
  };
  return (
    <div
      className="sheet-proxy is-response"
      role="slider"
      tabIndex={0}
      data-response=""
      aria-label="Response, frequency cursor"
      aria-valuemin={Math.round(first)}
      aria-valuemax={Math.round(last)}
      aria-valuenow={Math.round(at)}
      aria-valuetext={[formatFigure(at, "frequency"), ...(isVoid ? ["unstable"] : reading ? [`${formatDb(reading.gain, 2)}, ${degreesText(reading.phase)}`] : [])].join(": ")}
      style={{ left: response.left, top: response.top, width: response.right - response.left, height: response.bottom - response.top }}
      onKeyDown={onKeyDown}
      onFocus={(event) => {
        if (cursor === null && event.target.matches(":focus-visible")) onCursorAt(at);
      }}
      onBlur={() => onCursorAt(null)}
    />
  );
}

const QUARTER_TONE = 2 ** (1 / 24);
const THIRD = 2 ** (1 / 3);
const CURSOR_STEPS: Readonly<Record<string, number | undefined>> = { ArrowRight: QUARTER_TONE, ArrowUp: QUARTER_TONE, ArrowLeft: 1 / QUARTER_TONE, ArrowDown: 1 / QUARTER_TONE, PageUp: THIRD, PageDown: 1 / THIRD };
