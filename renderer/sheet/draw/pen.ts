import { FONT, type Inks } from "../tokens.ts";

export interface TextOpts {
  readonly size?: number;
  readonly isBold?: boolean;
  readonly color?: string;
  readonly align?: CanvasTextAlign;
  /** Paints the ground behind the letters first, so that lines beneath do not cut them. */
  readonly halo?: string;
  /** Struck through: the text means nothing. */
  readonly isStruck?: boolean;
}

/** Width of the warning sign, with the space that it keeps to what follows, px. */
export const SIGN_WIDTH = 13;

/** A canvas with the habits of this sheet: crisp lines at any pixel ratio, text set from its middle. */
export class Pen {
  readonly ctx: CanvasRenderingContext2D;
  readonly inks: Inks;
  readonly ratio: number;

  constructor(ctx: CanvasRenderingContext2D, inks: Inks, ratio: number) {
    this.ctx = ctx;
    this.inks = inks;
    this.ratio = ratio;
    ctx.lineJoin = "round";
    ctx.lineCap = "round";
    ctx.textBaseline = "middle";
  }

  /** A line width of whole device pixels, at least one. */
  width(wanted: number): number {
    return Math.max(1, Math.round(wanted * this.ratio)) / this.ratio;
  }

  /** A coordinate on which a line of that width covers whole device pixels. */
  snap(value: number, lineWidth: number): number {
    const offset = Math.round(lineWidth * this.ratio) % 2 === 1 ? 0.5 : 0;
    return (Math.round(value * this.ratio - offset) + offset) / this.ratio;
  }

  /** A polyline x, y, x, y …, each corner on the device's pixels. */
  line(points: readonly number[], color: string, lineWidth = 1.2, dash: readonly number[] = []): void {
    const { ctx } = this;
    const width = this.width(lineWidth);
    ctx.strokeStyle = color;
    ctx.lineWidth = width;
    ctx.setLineDash([...dash]);
    ctx.beginPath();
    for (let i = 0; i + 1 < points.length; i += 2) {
      const [x, y] = [this.snap(points[i], width), this.snap(points[i + 1], width)];
      if (i === 0) ctx.moveTo(x, y);
      else ctx.lineTo(x, y);
    }
    ctx.stroke();
    ctx.setLineDash([]);
  }

  /** A rectangle about a middle, its sides on the device's pixels; filled and then outlined. */
  box(x: number, y: number, width: number, height: number, opts: { fill?: string; stroke?: string; lineWidth?: number; radius?: number }): void {
    const { ctx } = this;
    const line = this.width(opts.lineWidth ?? 1.2);
    const left = this.snap(x - width / 2, line);
    const top = this.snap(y - height / 2, line);
    ctx.beginPath();
    ctx.roundRect(left, top, this.snap(x + width / 2, line) - left, this.snap(y + height / 2, line) - top, opts.radius ?? 0);
    if (opts.fill !== undefined) {
      ctx.fillStyle = opts.fill;
      ctx.fill();
    }
    if (opts.stroke !== undefined) {
      ctx.strokeStyle = opts.stroke;
      ctx.lineWidth = line;
      ctx.stroke();
    }
  }

  dot(x: number, y: number, radius: number, color: string): void {
    this.ctx.fillStyle = color;
    this.ctx.beginPath();
    this.ctx.arc(this.snap(x, 1), this.snap(y, 1), radius, 0, 2 * Math.PI);
    this.ctx.fill();
  }

  /** A triangle with a mark of exclamation, its middle at a place. */
  warningSign(x: number, y: number): void {
    const { ctx, inks } = this;
    ctx.beginPath();
    ctx.moveTo(x, y - 4.6);
    ctx.lineTo(x + 5, y + 4);
    ctx.lineTo(x - 5, y + 4);
    ctx.closePath();
    ctx.fillStyle = inks.paper;
    ctx.fill();
    ctx.strokeStyle = inks.warning;
    ctx.lineWidth = this.width(1.3);
    ctx.stroke();
    ctx.beginPath();
    ctx.moveTo(x, y - 1.6);
    ctx.lineTo(x, y + 1);
    ctx.moveTo(x, y + 2.4);
    ctx.lineTo(x, y + 2.5);
    ctx.stroke();
  }

  text(text: string, x: number, y: number, opts: TextOpts = {}): void {
    const { ctx } = this;
    ctx.font = fontOf(opts.size ?? 11, opts.isBold);
    ctx.textAlign = opts.align ?? "left";
    if (opts.halo !== undefined) {
      ctx.strokeStyle = opts.halo;
      ctx.lineWidth = 3;
      ctx.strokeText(text, x, y);
    }
    ctx.fillStyle = opts.color ?? this.inks.ink;
    ctx.fillText(text, x, y);
    if (!opts.isStruck) return;
    const { width } = ctx.measureText(text);
    const left = opts.align === "center" ? x - width / 2 : opts.align === "right" ? x - width : x;
    this.line([left - 1, y, left + width + 1, y], opts.color ?? this.inks.ink, 1.4);
  }

  widthOf(text: string, size = 11, isBold = false): number {
    this.ctx.font = fontOf(size, isBold);
    return this.ctx.measureText(text).width;
  }

  /** Draws inside a rectangle only, its sides on the device's pixels: an edge between pixels makes clipping slow. */
  clipped(left: number, top: number, right: number, bottom: number, draw: () => void): void {
    const whole = (value: number): number => Math.round(value * this.ratio) / this.ratio;
    this.ctx.save();
    this.ctx.beginPath();
    this.ctx.rect(whole(left), whole(top), whole(right) - whole(left), whole(bottom) - whole(top));
    this.ctx.clip();
    draw();
    this.ctx.restore();
  }
}

function fontOf(size: number, isBold = false): string {
  return `${isBold ? 600 : 400} ${size}px ${FONT}`;
}

/** A colour with an opacity; `color` is `#rrggbb`. */
export function faint(color: string, opacity: number): string {
  return `${color}${Math.round(opacity * 255).toString(16).padStart(2, "0")}`;
}
