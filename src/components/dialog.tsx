import { type ReactNode, useEffect, useId, useRef } from "react";

/** Only for a choice that blocks. Escape and the browser's back-out call `onClose`; focus goes back where it was. */
export function Dialog({
  isOpen,
  onClose,
  title,
  lead,
  actions,
  children,
}: {
  isOpen: boolean;
  onClose: () => void;
  title: ReactNode;
  lead?: ReactNode;
  actions: ReactNode;
  children?: ReactNode;
}) {
  const ref = useRef<HTMLDialogElement>(null);
  const titleId = useId();
  useEffect(() => {
    const dialog = ref.current;
    if (!dialog || !isOpen || dialog.open) return;
    dialog.showModal();
    return () => dialog.close();
  }, [isOpen]);
  if (!isOpen) return null;
  return (
    <dialog
      ref={ref}
      className="dialog"
      aria-labelledby={titleId}
      onCancel={(event) => {
        event.preventDefault();
        onClose();
      }}
    >
      <h2 id={titleId}>{title}</h2>
      {lead && <p className="lead">{lead}</p>}
      {children && <div className="dialog-body">{children}</div>}
      <div className="dialog-actions">{actions}</div>
    </dialog>
  );
}
