/** Work between two looks at the event loop, in milliseconds: cancellation must answer within 50. */
export const SLICE_MILLISECONDS = 12;

/** Resolves in a new macrotask, so that timers, messages and user input are handled first. */
export function nextMacrotask(): Promise<void> {
  return new Promise((resolve) => {
    const immediate = (globalThis as { setImmediate?: (f: () => void) => unknown }).setImmediate;
    if (immediate) immediate(resolve);
    else if (typeof MessageChannel === 'function') {
      // setTimeout is throttled to 4 ms when nested, to seconds in background tabs.
      const { port1, port2 } = new MessageChannel();
      port1.onmessage = () => {
        port1.close();
        resolve();
      };
      port2.postMessage(0);
    } else setTimeout(resolve, 0);
  });
}
