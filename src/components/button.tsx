import type { ButtonHTMLAttributes } from "react";
import { Link, type LinkProps } from "react-router-dom";

export interface ButtonLook {
  /** `primary`: one a page. `big`: an ink frame, for a hand in a glove. */
  kind?: "plain" | "primary" | "big";
  size?: "officer" | "supervisor" | "worker";
}

function look({ kind = "plain", size = "officer" }: ButtonLook, className = ""): string {
  return ["button", kind !== "plain" && `is-${kind}`, size !== "officer" && `is-${size}`, className]
    .filter(Boolean)
    .join(" ");
}

/**
 * `isBusy` keeps the focus and the words and refuses a second press: a disabled button would drop the focus and say
 * nothing about why.
 */
export function Button({
  kind,
  size,
  isBusy = false,
  className,
  onClick,
  ...props
}: ButtonHTMLAttributes<HTMLButtonElement> & ButtonLook & { isBusy?: boolean }) {
  return (
    <button
      type="button"
      {...props}
      className={look({ kind, size }, className)}
      aria-disabled={isBusy || props["aria-disabled"]}
      aria-busy={isBusy || undefined}
      onClick={(event) => {
        if (isBusy) event.preventDefault();
        else onClick?.(event);
      }}
    />
  );
}

export function ButtonLink({ kind, size, className, ...props }: LinkProps & ButtonLook) {
  return <Link {...props} className={look({ kind, size }, className)} />;
}
