/**
 * The memory behind every typed array in plain data that fills its buffer: it can be handed to another thread instead
 * of being copied. An array that shares its buffer with others, as Node's small ones do, is left to be copied.
 */
export function ownedBuffers(value: unknown): ArrayBuffer[] {
  const found = new Set<ArrayBuffer>();
  const look = (part: unknown): void => {
    if (ArrayBuffer.isView(part)) {
      const { buffer } = part;
      if (buffer instanceof ArrayBuffer && buffer.byteLength === part.byteLength) found.add(buffer);
    } else if (typeof part === 'object' && part !== null) Object.values(part).forEach(look);
  };
  look(value);
  return [...found];
}
