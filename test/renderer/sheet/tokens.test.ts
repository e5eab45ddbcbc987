import { describe, expect, test } from "vitest";
import { cssName, INKS, type Theme } from "../../../renderer/sheet/tokens.ts";

/** Contrast ratio of two `#rrggbb` colours (WCAG 2.2, relative luminance). */
function contrast(a: string, b: string): number {
  const luminance = (color: string): number => {
    const [r, g, bl] = [1, 3, 5].map((i) => Number.parseInt(color.slice(i, i + 2), 16) / 255).map((c) => (c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4));
    return 0.2126 * r + 0.7152 * g + 0.0722 * bl;
  };
  const [dark, light] = [luminance(a), luminance(b)].sort((x, y) => x - y);
  return (light + 0.05) / (dark + 0.05);
}

describe.each(["paper", "night"] as const)("inks of %s", (theme: Theme) => {
  const inks = INKS[theme];

  test("text keeps 4.5:1 on paper, cards and selections; lines and knobs 3:1", () => {
    for (const ground of [inks.paper, inks.card, inks.accentWash]) {
      for (const text of [inks.ink, inks.inkSoft, inks.boostText, inks.cutText, inks.accent]) expect(contrast(text, ground), `${text} on ${ground}`).toBeGreaterThanOrEqual(4.5);
      for (const line of [inks.boost, inks.cut]) expect(contrast(line, ground), `${line} on ${ground}`).toBeGreaterThanOrEqual(3);
    }
    expect(contrast(inks.warning, inks.paper)).toBeGreaterThanOrEqual(4.5);
  });
});

test("the style sheets know an ink under its name in their own spelling", () => {
  expect([cssName("paper"), cssName("inkSoft"), cssName("onAccent")]).toEqual(["--paper", "--ink-soft", "--on-accent"]);
});
