const NOBODY = 65534;

/**
 * Runs something without an administrator's rights: nothing is forbidden to those, so that a test about
 * permissions would see none. Whoever runs the tests as an ordinary user is one already.
 */
export async function asOrdinaryUser<T>(work: () => Promise<T>): Promise<T> {
  if (process.geteuid?.() !== 0) return work();
  process.seteuid?.(NOBODY);
  try {
    return await work();
  } finally {
    process.seteuid?.(0);
  }
}
