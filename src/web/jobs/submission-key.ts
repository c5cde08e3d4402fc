/** A key nobody else has; by `getRandomValues`, which plain HTTP within a plant has too. */
export function submissionKey(): string {
  const bytes = crypto.getRandomValues(new Uint8Array(16));
  return Array.from(bytes, (byte) => byte.toString(16).padStart(2, '0')).join('');
}
