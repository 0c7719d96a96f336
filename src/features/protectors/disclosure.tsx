import { type ReactNode, useState } from "react";

/** Part of a form that few need: folded until it is opened, holds something, or has a fault. */
export function Disclosure({
  title,
  stated,
  hasFault,
  children,
}: {
  title: ReactNode;
  /** What is in it, in few words; null: nothing. */
  stated: string | null;
  hasFault: boolean;
  children: ReactNode;
}) {
  const [isOpen, setIsOpen] = useState(stated !== null);
  return (
    <details
      className="form-part"
      open={isOpen || hasFault}
      onToggle={(event) => setIsOpen(event.currentTarget.open)}
    >
      <summary>
        {title}
        {stated && <span className="beneath">, {stated}</span>}
      </summary>
      <div className="form-part-fields">{children}</div>
    </details>
  );
}
