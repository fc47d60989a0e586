import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Heap } from '../../src/core/heap.ts';

const BASE = 1030;
const create = (maximum = 64) => new Heap(new WebAssembly.Memory({ initial: 1, maximum }), BASE);

/** Free the n-th live block, or take some bytes. */
const steps = fc.array(
  fc.oneof(
    fc.record({ take: fc.oneof(fc.nat(100), fc.nat(70_000)) }),
    fc.record({ free: fc.nat(1000) }),
    fc.record({ free: fc.nat(1000) }),
  ),
  { maxLength: 120 },
);

describe('Heap', () => {
  test('live blocks are aligned, apart, inside the memory and keep their contents', () => {
    fc.assert(
      fc.property(steps, (list) => {
        const heap = create(1024);
        const live: { address: number; bytes: number; mark: number }[] = [];
        let mark = 0;
        for (const step of list) {
          if ('take' in step) {
            const address = heap.allocate(step.take);
            mark = (mark % 250) + 1;
            heap.u8(address, step.take).fill(mark);
            live.push({ address, bytes: step.take, mark });
          } else if (live.length > 0) {
            const [gone] = live.splice(step.free % live.length, 1);
            heap.free(gone!.address);
          }
          expect(heap.used).toBe(
            live.reduce((sum, b) => sum + Math.max(16, Math.ceil(b.bytes / 16) * 16), 0),
          );
          expect(heap.peak).toBeGreaterThanOrEqual(heap.used);
        }
        const byAddress = live.sort((a, b) => a.address - b.address);
        byAddress.forEach((block, i) => {
          expect(block.address % 16).toBe(0);
          expect(block.address).toBeGreaterThanOrEqual(BASE);
          expect(block.address + block.bytes).toBeLessThanOrEqual(heap.memory.buffer.byteLength);
          const next = byAddress[i + 1];
          if (next) expect(block.address + Math.max(block.bytes, 16)).toBeLessThanOrEqual(next.address);
          expect(heap.u8(block.address, block.bytes).every((x) => x === block.mark)).toBe(true);
        });
        // Everything given back joins to one free space: the first address comes again.
        const first = create(1024).allocate(1);
        for (const block of byAddress) heap.free(block.address);
        expect(heap.used).toBe(0);
        expect(heap.allocate(1)).toBe(first);
      }),
    );
  });

  test('freed neighbours merge, whatever the order', () => {
    fc.assert(
      fc.property(fc.uniqueArray(fc.nat(7), { minLength: 8, maxLength: 8 }), (order) => {
        const heap = create();
        const blocks = Array.from({ length: 8 }, () => heap.allocate(1000));
        const guard = heap.allocate(16);
        for (const i of order) heap.free(blocks[i]!);
        expect(heap.allocate(8 * 1008)).toBe(blocks[0]);
        expect(guard).toBe(blocks[0]! + 8 * 1008);
      }),
    );
  });

  test('a block freed twice, or never given out, is an error', () => {
    const heap = create();
    const address = heap.allocate(10);
    heap.free(address);
    expect(() => heap.free(address)).toThrow(RangeError);
    expect(() => heap.free(4)).toThrow(RangeError);
  });

  test('a refusal of the host is MEMORY_LIMIT and leaves the heap as it was', () => {
    const heap = create(2);
    const address = heap.allocate(1000);
    heap.u8(address, 1000).fill(7);
    for (const bytes of [3 * 65_536, 2 ** 33, 2 ** 45])
      expect(() => heap.allocate(bytes)).toThrow(expect.objectContaining({ code: 'MEMORY_LIMIT' }));
    expect(heap.used).toBe(1008);
    expect(heap.u8(address, 1000).every((x) => x === 7)).toBe(true);
    expect(heap.allocate(16)).toBe(address + 1008);
  });
});

describe('Scope', () => {
  test('gives its blocks back, also when the work throws', () => {
    const heap = create();
    const kept = heap.allocate(32);
    expect(() =>
      heap.scope((scope) => {
        scope.take(500);
        scope.put(Float64Array.of(1, 2));
        throw new Error('work failed');
      }),
    ).toThrow('work failed');
    expect(heap.used).toBe(32);
    heap.free(kept);
    expect(heap.used).toBe(0);
  });

  test('puts the viewed part of an array only, and copies results out', () => {
    const heap = create();
    const whole = Float64Array.of(1, 2, 3, 4, 5);
    const [copy, ints] = heap.scope((scope) => {
      const address = scope.put(whole.subarray(1, 4));
      const integers = scope.put(Int32Array.of(-1, 7));
      return [scope.copyF64(address, 3), scope.copyI32(integers, 2)];
    });
    heap.scope((scope) => heap.u8(scope.take(200), 200).fill(0xff));
    expect([...copy!]).toEqual([2, 3, 4]);
    expect([...ints!]).toEqual([-1, 7]);
  });
});
