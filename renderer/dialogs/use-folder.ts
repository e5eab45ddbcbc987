import { useEffect, useState } from "react";
import type { ResultOf } from "../../core/contract/methods.ts";
import { useShell } from "../editor/hooks.ts";

type Listing = ResultOf<"files.list">;

/** A folder as the host lists it; null is the user's projects folder. A folder that cannot be listed leaves the last one. */
export function useFolder(folder: string | null): { readonly listing: Listing | null; readonly problem: string | null } {
  const { host } = useShell();
  const [state, setState] = useState<{ readonly listing: Listing | null; readonly problem: string | null }>({ listing: null, problem: null });
  useEffect(() => {
    let isCurrent = true;
    host.call("files.list", { folder }).then(
      (listing) => isCurrent && setState({ listing, problem: null }),
      (error: unknown) => isCurrent && setState((old) => ({ ...old, problem: error instanceof Error ? error.message : String(error) })),
    );
    return () => {
      isCurrent = false;
    };
  }, [host, folder]);
  return state;
}
