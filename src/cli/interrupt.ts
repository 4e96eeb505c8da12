/** Signals that ask a program to stop, with the exit code the shell expects: 128 and the signal's number. */
const SIGNALS = { SIGINT: 130, SIGTERM: 143, SIGHUP: 129 } as const;

/**
 * Runs `write` so that a signal cannot leave half of it: a signal waits until the synchronous part in progress is
 * over, then `discard` removes what is not finished and the process ends with the signal's code.
 *
 * Outside such a stretch nothing is being written, and the system's own way of ending a process does.
 */
export async function uninterrupted<T>(write: () => T | Promise<T>, discard: () => void): Promise<T> {
  const handlers = Object.entries(SIGNALS).map(([signal, code]) => {
    const handler = () => {
      discard();
      process.exit(code);
    };
    process.once(signal, handler);
    return { signal, handler };
  });
  try {
    const result = await write();
    // a signal that came while the files went down is told to the handlers on the next turn
    await new Promise((turn) => setImmediate(turn));
    return result;
  } finally {
    for (const { signal, handler } of handlers) process.removeListener(signal, handler);
  }
}
