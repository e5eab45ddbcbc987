import type { Encoding } from "../../core/drawer/mapping.ts";

/** A file's bytes as text: by its mark, as UTF-8 where it is that, else as the older encoding of spreadsheets. */
export function decodeText(bytes: ArrayBuffer, encoding: Encoding | null): { readonly text: string; readonly encoding: Encoding } {
  const [first, second] = new Uint8Array(bytes, 0, Math.min(2, bytes.byteLength));
  if (encoding === null && first === 0xff && second === 0xfe) return decodeText(bytes, "utf-16le");
  if (encoding !== null) return { text: new TextDecoder(encoding).decode(bytes), encoding };
  try {
    return { text: new TextDecoder("utf-8", { fatal: true }).decode(bytes), encoding: "utf-8" };
  } catch {
    return { text: new TextDecoder("windows-1252").decode(bytes), encoding: "windows-1252" };
  }
}
