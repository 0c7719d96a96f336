import { useEffect, useState } from "react";

/** Where the worker lies, and what it is told (src/service-worker.ts). */
const ADDRESS = "/service-worker.js";

/**
 * Lets the shell of the crew's pages open without a connection. A newer version waits until it is asked for: the answer is
 * how to go over to it, or null.
 */
export function useNewVersion(): (() => void) | null {
  const [waiting, setWaiting] = useState<ServiceWorker | null>(null);
  useEffect(() => {
    if (!import.meta.env.PROD || !("serviceWorker" in navigator)) return;
    let isLeft = false;
    void navigator.serviceWorker.register(ADDRESS).then(
      (registration) => {
        const look = () => {
          // The first version of all waits for nobody.
          if (!isLeft && registration.waiting && navigator.serviceWorker.controller)
            setWaiting(registration.waiting);
        };
        look();
        registration.addEventListener("updatefound", () =>
          registration.installing?.addEventListener("statechange", look),
        );
      },
      () => undefined, // without it the pages are as they were
    );
    return () => {
      isLeft = true;
    };
  }, []);
  if (!waiting) return null;
  return () => {
    navigator.serviceWorker.addEventListener("controllerchange", () => window.location.reload(), {
      once: true,
    });
    waiting.postMessage("take-over");
  };
}
