import { act, createRef, useState } from "react";
import { createRoot, type Root } from "react-dom/client";
import { vi } from "vitest";
import type { Project } from "../../../core/model/project.ts";
import { ResultsEngine } from "../../../renderer/editor/results.ts";
import { Sheet } from "../../../renderer/sheet/Sheet.tsx";
import type { SheetHandle, SheetProps } from "../../../renderer/sheet/sheet-props.ts";

export type Log = [name: string, ...args: unknown[]][];

/** A sheet on a page, with a shell that does what it is told and writes it down. */
export interface Mounted {
  readonly page: HTMLElement;
  readonly sheet: HTMLElement;
  readonly handle: SheetHandle;
  readonly log: Log;
  project(): Project;
  selection(): readonly string[];
  unmount(): Promise<void>;
}

const RANGE = { from: 20, to: 20e3 };

/** What jsdom leaves out: sizes of elements, and telling of their changes. */
export function stubSurroundings(width = 1100, height = 780): void {
  vi.stubGlobal("IS_REACT_ACT_ENVIRONMENT", true);
  vi.stubGlobal("ResizeObserver", class { observe(): void {} disconnect(): void {} unobserve(): void {} });
  vi.spyOn(HTMLElement.prototype, "clientWidth", "get").mockReturnValue(width);
  vi.spyOn(HTMLElement.prototype, "clientHeight", "get").mockReturnValue(height);
  HTMLElement.prototype.setPointerCapture = () => undefined;
  HTMLElement.prototype.releasePointerCapture = () => undefined;
}

export async function mountSheet(start: Project, extra: Partial<SheetProps> = {}): Promise<Mounted> {
  const log: Log = [];
  const ref = createRef<SheetHandle>();
  const engine = new ResultsEngine();
  const state = { project: start, selection: [] as readonly string[] };

  function Shell() {
    const [project, setProject] = useState(start);
    const [selection, setSelection] = useState<readonly string[]>([]);
    Object.assign(state, { project, selection });
    const { board, results } = engine.analyse(project, selection, RANGE);
    const change = (id: string, patch: (block: Project["blocks"][number]) => Project["blocks"][number]): void =>
      setProject((p) => ({ ...p, blocks: p.blocks.map((b) => (b.id === id ? patch(b) : b)) }));
    return (
      <Sheet
        ref={ref} project={project} board={board} results={results} selection={selection} theme="paper" range={RANGE}
        onSelect={(ids, mode) => { log.push(["select", ids, mode]); setSelection(ids); }}
        onKnobStart={(id) => { log.push(["start", id]); }}
        onKnobMove={(id, position) => { log.push(["move", id, position]); change(id, (b) => ({ ...b, slider: { ...b.slider!, position } })); }}
        onKnobEnd={() => { log.push(["end"]); }}
        onKnobCancel={() => { log.push(["cancel"]); setProject(start); }}
        onMove={(moves) => { log.push(["place", moves]); for (const { id, at } of moves) change(id, (b) => ({ ...b, at })); }}
        onEditValue={(id, role, text) => { log.push(["edit", id, role, text]); return text === "bad" ? "not understood" : null; }}
        onContextMenu={(at) => { log.push(["menu", at.target]); }}
        onCursor={(frequency) => { log.push(["cursor", frequency]); }}
        {...extra}
      />
    );
  }

  const place = document.body.appendChild(document.createElement("div"));
  let root: Root | undefined;
  await act(async () => {
    root = createRoot(place);
    root.render(<Shell />);
  });
  return {
    page: place,
    sheet: place.querySelector<HTMLElement>(".sheet")!,
    get handle() {
      return ref.current!;
    },
    log,
    project: () => state.project,
    selection: () => state.selection,
    unmount: async () => {
      await act(async () => root!.unmount());
      place.remove();
    },
  };
}
