/**
 * A sign with the meaning "wear hearing protection": a white figure on a round blue ground, blue being the safety colour
 * of what has to be done and covering at least half of it. Meaning after ISO 7010 M003, shape and colour after
 * ISO 3864-1, both from memory; the drawing is our own.
 */
export function MandatoryHearingSign({ title }: { title: string }) {
  return (
    <svg className="mandatory-sign" viewBox="0 0 200 200" role="img" aria-label={title}>
      <circle cx="100" cy="100" r="98" fill="#005387" />
      <g fill="#fff">
        <path d="M100 52c-25 0-39 18-39 44 0 30 17 56 39 56s39-26 39-56c0-26-14-44-39-44Z" />
        <path d="M52 163c8-8 21-13 33-15 4 6 9 9 15 9s11-3 15-9c12 2 25 7 33 15a98 98 0 0 1-96 0Z" />
        <path
          d="M47 92C47 57 70 35 100 35s53 22 53 57"
          fill="none"
          stroke="#fff"
          strokeWidth="9"
          strokeLinecap="round"
        />
        <rect x="38" y="82" width="24" height="46" rx="11" stroke="#005387" strokeWidth="4" />
        <rect x="138" y="82" width="24" height="46" rx="11" stroke="#005387" strokeWidth="4" />
      </g>
    </svg>
  );
}
