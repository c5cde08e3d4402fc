/**
 * Rings of a directed graph: for each step that leads back into the way it came by, that ring, its
 * first node being the one the step leads to. Every ring shares a step with one of those returned;
 * a graph without rings returns none.
 */
export function ringsOf(
  nodes: Iterable<string>,
  next: (node: string) => readonly string[],
): readonly (readonly string[])[] {
  const rings: string[][] = [];
  const done = new Set<string>();
  const way: string[] = [];
  const visit = (node: string): void => {
    way.push(node);
    for (const other of next(node)) {
      const back = way.indexOf(other);
      if (back !== -1) rings.push(way.slice(back));
      else if (!done.has(other)) visit(other);
    }
    way.pop();
    done.add(node);
  };
  for (const node of nodes) if (!done.has(node)) visit(node);
  return rings;
}
