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

/** The frame of every dialog: title, body that scrolls, answers below. */
export function DialogFrame({ title, children, foot, onDismiss, size, focusRef, isTitleHidden }: DialogFrameProps) {
  const popup = useRef<HTMLDivElement>(null);
  /** At once, not with the next frame as the library has it: quick hands type on. True leaves the first control to the library. */
  const takeFocus = (): boolean => {
    const first = focusRef?.current;
    (first ?? popup.current)?.focus();
    return !first;
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
