import type { ButtonHTMLAttributes, ReactNode } from "react";
import { Link, type LinkProps } from "react-router-dom";

/** Goes somewhere. */
export function TextLink({ className = "", ...props }: LinkProps) {
  return <Link className={`link ${className}`} {...props} />;
}

/** Does something, and reads like a word in the sentence: Look, Hold, Send now. */
export function TextButton({
  className = "",
  ...props
}: ButtonHTMLAttributes<HTMLButtonElement> & { children: ReactNode }) {
  return <button type="button" className={`link ${className}`} {...props} />;
}
