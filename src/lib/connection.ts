import { useEffect, useState } from "react";
import { type ConnectionState, connectionEvents } from "./api";

/** Whether the server was reached last; what is asked and sent says it. */
export function useConnection(): ConnectionState {
  const [state, setState] = useState<ConnectionState>(connectionEvents.now);
  useEffect(() => connectionEvents.subscribe(setState), []);
  return state;
}
