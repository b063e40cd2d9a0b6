import { describe, expect, it } from 'vitest';
import { SharedReads } from '@/lib/services/shared-reads';

/** Reads that are settled by hand, in the order in which they began. */
function gate() {
  const begun: { resolve: (value: number) => void; reject: (error: Error) => void }[] = [];
  const act = () => new Promise<number>((resolve, reject) => begun.push({ resolve, reject }));
  return { begun, act };
}
const turns = () => new Promise((resolve) => setTimeout(resolve, 0));

describe('a shared read', () => {
  it('serves all who asked while another was under way, and begins after they did', async () => {
    const reads = new SharedReads<number>();
    const { begun, act } = gate();
    const first = reads.read('a', act);
    const rest = [reads.read('a', act), reads.read('a', act), reads.read('a', act)];
    expect(begun).toHaveLength(1);
    begun[0].resolve(1);
    expect(await first).toBe(1);
    await turns();
    expect(begun).toHaveLength(2);
    const late = reads.read('a', act);
    begun[1].resolve(2);
    expect(await Promise.all(rest)).toEqual([2, 2, 2]);
    await turns();
    begun[2].resolve(3);
    expect(await late).toBe(3);
  });

  it('is of its key alone, and begins at once where none is under way', async () => {
    const reads = new SharedReads<number>();
    const { begun, act } = gate();
    const both = [reads.read('a', act), reads.read('b', act)];
    expect(begun).toHaveLength(2);
    begun[0].resolve(1);
    begun[1].resolve(2);
    expect(await Promise.all(both)).toEqual([1, 2]);
    await turns();
    const again = reads.read('a', act);
    expect(begun).toHaveLength(3);
    begun[2].resolve(3);
    expect(await again).toBe(3);
  });

  it('that fails fails for those who share it, and the next is tried all the same', async () => {
    const reads = new SharedReads<number>();
    const { begun, act } = gate();
    const first = reads.read('a', act);
    const second = reads.read('a', act);
    begun[0].reject(new Error('away'));
    await expect(first).rejects.toThrow('away');
    await turns();
    begun[1].resolve(2);
    expect(await second).toBe(2);
  });
});
