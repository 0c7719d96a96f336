import type { ReactNode } from "react";

/**
 * A typeset line of arithmetic. `spoken` is how it is read out, for subscripts and fractions alone are noise to a
 * screen reader.
 */
export function Equation({
  number,
  spoken,
  children,
}: {
  number?: number;
  spoken: string;
  children: ReactNode;
}) {
  return (
    <div className="equation">
      <div className="equation-math">
        <span className="sr-only">{spoken}</span>
        <span aria-hidden="true">{children}</span>
      </div>
      {number !== undefined && <span className="equation-number">({number})</span>}
    </div>
  );
}

/** A quantity: letter in italics, upright index, raised part: L′, EX,8h. */
export function Sym({
  children,
  sub,
  sup,
}: {
  children: ReactNode;
  sub?: ReactNode;
  sup?: ReactNode;
}) {
  return (
    <span className="sym">
      <i>{children}</i>
      {sub !== undefined && <sub>{sub}</sub>}
      {sup !== undefined && <sup>{sup}</sup>}
    </span>
  );
}

export function Power({ base, children }: { base: ReactNode; children: ReactNode }) {
  return (
    <span className="sym">
      {base}
      <sup>{children}</sup>
    </span>
  );
}

export function Fraction({ over, under }: { over: ReactNode; under: ReactNode }) {
  return (
    <span className="fraction">
      <span>{over}</span>
      <span>{under}</span>
    </span>
  );
}

export function Sum() {
  return <span className="sum">Σ</span>;
}

/** =, ≤, +, with room on both sides. */
export function Relation({ children = "=" }: { children?: ReactNode }) {
  return <span className="relation">{children}</span>;
}

/** Numbers put in. */
export function PutIn({ children }: { children: ReactNode }) {
  return <span className="put-in">{children}</span>;
}

/** What comes out, underlined. */
export function Result({ children }: { children: ReactNode }) {
  return <strong className="equation-result">{children}</strong>;
}
