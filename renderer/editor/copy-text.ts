/** Puts a text on the clipboard. @throws Error where that is not allowed */
export async function copyText(text: string): Promise<void> {
  try {
    await navigator.clipboard.writeText(text);
  } catch {
    // The desktop window grants no permissions at all; the older way needs none.
    const focused = document.activeElement;
    const carrier = document.createElement("textarea");
    carrier.value = text;
    document.body.append(carrier);
    carrier.select();
    const isCopied = document.execCommand("copy");
    carrier.remove();
    if (focused instanceof HTMLElement) focused.focus();
    if (!isCopied) throw new Error("The clipboard cannot be used here.");
  }
}
