/** The parts of a `KeyboardEvent` that chords look at. */
export interface KeyPress {
  readonly key: string;
  readonly code: string;
  readonly ctrlKey: boolean;
  readonly metaKey: boolean;
  readonly shiftKey: boolean;
  readonly altKey: boolean;
}

interface Chord {
  readonly key: string;
  readonly isMod: boolean;
  readonly isShift: boolean;
  readonly isAlt: boolean;
}

function parse(text: string): Chord {
  const parts = text.split("+");
  // The plus key itself leaves an empty part behind.
  const key = text.endsWith("+") ? "+" : parts.at(-1)!;
  return { key, isMod: parts.includes("Mod"), isShift: parts.includes("Shift"), isAlt: parts.includes("Alt") };
}

function isLetter(key: string): boolean {
  return /^[A-Z]$/.test(key);
}

/**
 * Whether a key press is a chord, on any keyboard layout: a letter is the letter that the layout gives, and where the
 * layout has no Latin letter there (or Alt makes it a special character) the key's place counts. A sign such as `?` or
 * `+` is itself, whether or not it takes Shift.
 */
export function isChord(press: KeyPress, text: string, isMac: boolean): boolean {
  const chord = parse(text);
  const isMod = isMac ? press.metaKey : press.ctrlKey;
  const isOther = isMac ? press.ctrlKey : press.metaKey;
  if (isOther || isMod !== chord.isMod || press.altKey !== chord.isAlt) return false;
  if (isLetter(chord.key)) {
    if (press.shiftKey !== chord.isShift) return false;
    const isLatin = /^[a-z]$/i.test(press.key);
    return isLatin && !chord.isAlt ? press.key.toUpperCase() === chord.key : press.code === `Key${chord.key}`;
  }
  if (chord.key.length === 1) return press.key === chord.key;
  return press.shiftKey === chord.isShift && press.key === chord.key;
}

const MAC_SIGNS: Readonly<Record<string, string>> = { Mod: "⌘", Shift: "⇧", Alt: "⌥" };
const KEY_NAMES: Readonly<Record<string, string>> = { Escape: "Esc", Delete: "Del", "-": "−" };

/** A chord as people read it: `Ctrl+Shift+Z`, `⇧⌘Z`. */
export function chordText(text: string, isMac: boolean): string {
  const { key, isMod, isShift, isAlt } = parse(text);
  const name = KEY_NAMES[key] ?? key;
  if (isMac) return `${isAlt ? MAC_SIGNS.Alt : ""}${isShift ? MAC_SIGNS.Shift : ""}${isMod ? MAC_SIGNS.Mod : ""}${name}`;
  return [isMod ? "Ctrl" : "", isAlt ? "Alt" : "", isShift ? "Shift" : "", name].filter((part) => part !== "").join("+");
}

/** Whether a chord has Ctrl, Cmd or Alt in it (or is a key that types nothing). */
export function isQuietChord(text: string): boolean {
  const chord = parse(text);
  return chord.isMod || chord.isAlt || chord.key.length > 1;
}
