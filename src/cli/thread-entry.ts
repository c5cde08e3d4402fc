/** The compiled entry of a calculation thread, beside this program. */
export const threadEntry = new URL('../../workers/compute-thread.js', import.meta.url);
