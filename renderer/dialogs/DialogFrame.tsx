import { Dialog } from "@base-ui/react/dialog";
import { useRef, type ReactNode, type RefObject } from "react";

interface DialogFrameProps {
  readonly title: string;
  readonly children: ReactNode;
  readonly foot?: ReactNode;
  /** Escape, or a click beside it. */
  readonly onDismiss: () => void;
  readonly size?: "is-wide" | "is-broad" | "is-top";
  /** What has the focus first; the first control where not given. */
  readonly focusRef?: RefObject<HTMLElement | null>;
  readonly isTitleHidden?: boolean;
}

const CONTROLS = ["button:enabled", "input:enabled", "select:enabled", "textarea:enabled", "a[href]", "[tabindex]"].map((one) => `${one}:not([tabindex="-1"])`).join();

/** The first control that Tab would come to. */
function firstControl(popup: HTMLElement | null): HTMLElement | undefined {
  return [...(popup?.querySelectorAll<HTMLElement>(CONTROLS) ?? [])].find((control) => control.checkVisibility({ visibilityProperty: true }));
}

/** The frame of every dialog: title, body that scrolls, answers below. */
export function DialogFrame({ title, children, foot, onDismiss, size, focusRef, isTitleHidden }: DialogFrameProps) {
  const popup = useRef<HTMLDivElement>(null);
  /** At once, not with the next frame as the library has it: quick hands type on, and tab on. The library moves nothing. */
  const takeFocus = (): false => {
    (focusRef?.current ?? firstControl(popup.current) ?? popup.current)?.focus();
    return false;
  };

  return (
    <Dialog.Root open onOpenChange={(isOpen) => !isOpen && onDismiss()}>
      <Dialog.Portal>
        <Dialog.Backdrop className="backdrop" />
        <Dialog.Popup ref={popup} className={size === undefined ? "dialog" : `dialog ${size}`} initialFocus={takeFocus}>
          <Dialog.Title className={isTitleHidden ? "visually-hidden" : undefined}>{title}</Dialog.Title>
          <div className="dialog-body">{children}</div>
          {foot !== undefined && <div className="dialog-foot">{foot}</div>}
        </Dialog.Popup>
      </Dialog.Portal>
    </Dialog.Root>
  );
}
