import { useEffect, useRef, useState } from "react";

/** How wide a picture's frame is, px: its drawing is in whole pixels and not stretched. */
export function useWidth(startPx: number) {
  const ref = useRef<HTMLDivElement>(null);
  const [widthPx, setWidthPx] = useState(startPx);
  useEffect(() => {
    const element = ref.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const observer = new ResizeObserver(([entry]) => {
      if (entry && entry.contentRect.width > 0) setWidthPx(Math.round(entry.contentRect.width));
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);
  return { ref, widthPx };
}
