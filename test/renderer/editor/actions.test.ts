import { describe, expect, test } from "vitest";
import { chordsOf, MENUS, type ActionContext } from "../../../renderer/editor/actions/action.ts";
import { ACTIONS, actionForKey } from "../../../renderer/editor/actions/actions.ts";
import { chordText, isChord, type KeyPress } from "../../../renderer/editor/actions/chords.ts";
import { createEditor } from "../../../renderer/editor/store.ts";
import { newProject } from "../../../core/model/new-project.ts";
import { BAND_KINDS } from "../../../core/blocks/index.ts";

function press(key: string, code: string, modifiers: Partial<KeyPress> = {}): KeyPress {
  return { key, code, ctrlKey: false, metaKey: false, shiftKey: false, altKey: false, ...modifiers };
}

const browser = { isDesktop: false };
const desktop = { isDesktop: true };

function unused(): never {
  throw new Error("not used");
}

function idAt(focus: Parameters<typeof actionForKey>[1], key: KeyPress): string | undefined {
  return actionForKey(key, focus, context())?.id;
}

/** What key matching looks at; nothing is performed here. */
function context(isMac = false): ActionContext {
  return {
    editor: createEditor(newProject()),
    ui: { store: unused, ask: unused, notify: unused, setTheme: unused, patch: unused } as unknown as ActionContext["ui"],
    drawer: unused as unknown as ActionContext["drawer"],
    files: { launch: unused, createNew: unused, open: unused, openPath: unused, save: unused, saveAs: unused },
    sheet: () => null,
    isVoid: () => false,
    clipboard: { bands: [] },
    isMac,
    isDesktop: false,
  };
}

describe("the action table", () => {
  test.each([["browser", browser], ["desktop", desktop]])("no two actions share a chord (%s)", (_name, shell) => {
    const owners = new Map<string, string>();
    for (const action of ACTIONS) {
      for (const chord of chordsOf(action, shell)) {
        expect(owners.get(chord), `${chord} of ${action.id}`).toBeUndefined();
        owners.set(chord, action.id);
      }
    }
    expect(owners.size).toBeGreaterThan(20);
  });

  test("ids differ, and every menu has entries", () => {
    expect(new Set(ACTIONS.map((a) => a.id)).size).toBe(ACTIONS.length);
    for (const menu of MENUS) expect(ACTIONS.some((a) => a.menu === menu)).toBe(true);
  });

  test("groups of a menu stand together", () => {
    for (const menu of MENUS) {
      const groups = ACTIONS.filter((a) => a.menu === menu).map((a) => a.group);
      expect(groups).toEqual([...groups].sort((a, b) => a - b));
    }
  });

  test("every band kind can be added and changed to", () => {
    for (const kind of BAND_KINDS) {
      expect(ACTIONS.some((a) => a.id === `add-${kind}`)).toBe(true);
      expect(ACTIONS.some((a) => a.id === `change-to-${kind}`)).toBe(true);
    }
  });

  test("in a browser no chord is one that the browser keeps for itself", () => {
    const kept = new Set(["Mod+N", "Mod+T", "Mod+W", "Mod+Shift+N", "Mod+Shift+T", "Mod+Shift+W"]);
    for (const action of ACTIONS) for (const chord of chordsOf(action, browser)) expect(kept.has(chord), action.id).toBe(false);
  });
});

describe("chords", () => {
  test("letters follow the layout, and the key's place where the layout has no Latin letters", () => {
    // On a French layout the key at Q's place gives A.
    expect(isChord(press("a", "KeyQ", { ctrlKey: true }), "Mod+A", false)).toBe(true);
    expect(isChord(press("q", "KeyA", { ctrlKey: true }), "Mod+A", false)).toBe(false);
    expect(isChord(press("я", "KeyZ", { ctrlKey: true }), "Mod+Z", false)).toBe(true);
    expect(isChord(press("Z", "KeyZ", { ctrlKey: true, shiftKey: true }), "Mod+Shift+Z", false)).toBe(true);
    expect(isChord(press("z", "KeyZ", { ctrlKey: true }), "Mod+Shift+Z", false)).toBe(false);
  });

  test("signs are themselves, with or without Shift", () => {
    expect(isChord(press("?", "Slash", { shiftKey: true }), "?", false)).toBe(true);
    expect(isChord(press("?", "KeyM"), "?", false)).toBe(true);
    expect(isChord(press("+", "NumpadAdd"), "+", false)).toBe(true);
    expect(isChord(press("/", "Slash"), "?", false)).toBe(false);
  });

  test("Mod is Cmd on a Mac and Ctrl elsewhere", () => {
    expect(isChord(press("s", "KeyS", { metaKey: true }), "Mod+S", true)).toBe(true);
    expect(isChord(press("s", "KeyS", { ctrlKey: true }), "Mod+S", true)).toBe(false);
    expect(isChord(press("s", "KeyS", { metaKey: true }), "Mod+S", false)).toBe(false);
  });

  test("Alt chords go by the key's place, since Alt changes what it types", () => {
    expect(isChord(press("˜", "KeyN", { altKey: true, shiftKey: true }), "Alt+Shift+N", true)).toBe(true);
  });

  test("are written as people read them", () => {
    expect(chordText("Mod+Shift+Z", false)).toBe("Ctrl+Shift+Z");
    expect(chordText("Mod+Shift+Z", true)).toBe("⇧⌘Z");
    expect(chordText("-", false)).toBe("−");
  });
});

describe("keys are not stolen", () => {
  test("while typing", () => {
    for (const action of ACTIONS) {
      if (action.inFields !== "always") continue;
      for (const chord of chordsOf(action, browser)) expect(chord).toMatch(/Mod|Alt/);
    }
    expect(idAt("field", press("f", "KeyF"))).toBeUndefined();
    expect(idAt("field", press("Delete", "Delete"))).toBeUndefined();
    expect(idAt("field", press("z", "KeyZ", { ctrlKey: true }))).toBeUndefined();
    expect(idAt("field", press("a", "KeyA", { ctrlKey: true }))).toBeUndefined();
    expect(idAt("field", press("s", "KeyS", { ctrlKey: true }))).toBe("save");
    expect(idAt("field", press("?", "Slash", { shiftKey: true }))).toBeUndefined();
  });

  test("in a field whose text is untouched, undo is the board's", () => {
    expect(idAt("untouched-field", press("z", "KeyZ", { ctrlKey: true }))).toBe("undo");
    expect(idAt("untouched-field", press("c", "KeyC", { ctrlKey: true }))).toBeUndefined();
  });

  test("from buttons and lists", () => {
    expect(idAt("elsewhere", press("f", "KeyF"))).toBeUndefined();
    expect(idAt("elsewhere", press("Delete", "Delete"))).toBeUndefined();
    expect(idAt("elsewhere", press("z", "KeyZ", { ctrlKey: true }))).toBe("undo");
    expect(idAt("sheet", press("f", "KeyF"))).toBe("fit");
    expect(idAt("sheet", press("Delete", "Delete"))).toBe("delete");
    expect(idAt("sheet", press("?", "Slash", { shiftKey: true }))).toBe("keys");
  });
});
