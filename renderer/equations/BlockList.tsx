import { BLOCKS } from "../../core/blocks/index.ts";
import type { Block } from "../../core/model/project.ts";
import type { Board } from "../../core/net/board.ts";
import { nameOfBlock } from "../panels/Stability.tsx";
import { REFERENCE } from "./shown.ts";

interface BlockListProps {
  readonly board: Board;
  /** The block on the screen; null on the page of the whole board. */
  readonly shown: string | null;
  readonly onShow: (id: string) => void;
}

/** The blocks in the order that the signal takes, bands under their stage, and what belongs to the board as a whole. */
export function BlockList({ board, shown, onShow }: BlockListProps) {
  const entry = (id: string, name: string, about: string, isBand = false) => (
    <li key={id}>
      <button type="button" className={isBand ? "equations-entry is-band" : "equations-entry"} aria-current={id === shown ? "page" : undefined} onClick={() => onShow(id)}>
        <span>{name}</span>
        {about !== "" && <span className="equations-about">{about}</span>}
      </button>
    </li>
  );
  const ofBlock = (block: Block, isBand: boolean) => {
    const kind = BLOCKS[block.kind].label;
    const name = nameOfBlock(board.project, block.id);
    return entry(block.id, name, name === kind ? "" : kind.toLowerCase(), isBand);
  };
  return (
    <nav className="equations-list" aria-label="Pages of equations">
      <h2>Blocks</h2>
      <ul>
        {board.chain.flatMap(({ block, bands }) => [ofBlock(block, false), ...bands.map((band) => ofBlock(band, true))])}
        {board.project.supply.kind === "single" && entry(REFERENCE, "Signal reference", "divider of the supply")}
      </ul>
      <h2>Whole board</h2>
      <ul>
        <li>
          <button type="button" className="equations-entry" aria-current={shown === null ? "page" : undefined} onClick={() => onShow("poles")}>
            Poles, zeros and loops
          </button>
        </li>
      </ul>
    </nav>
  );
}
