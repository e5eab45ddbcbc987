import katex, { type KatexOptions } from "katex";
import "katex/contrib/copy-tex";
import "katex/dist/katex.min.css";
import { memo, useLayoutEffect, useRef } from "react";

/** Ids of blocks may hold any letter: that is no fault of the equation. */
const OPTIONS: KatexOptions = { throwOnError: false, strict: "ignore", output: "htmlAndMathml" };

interface TexProps {
  readonly tex: string;
}

/** An equation, typeset. What is marked and copied of it is its LaTeX; a screen reader gets MathML. */
export const Tex = memo(function Tex({ tex }: TexProps) {
  const element = useRef<HTMLSpanElement>(null);
  useLayoutEffect(() => {
    // Built as elements: the content policy forbids the style attributes of a text set as HTML.
    if (element.current) katex.render(`\\displaystyle ${tex}`, element.current, OPTIONS);
  }, [tex]);
  return <span className="tex" ref={element} />;
});
