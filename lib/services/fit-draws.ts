import { Op } from 'sequelize';
import { FitBlock } from '@/models';
import { readDoubles } from './inference-spec';
import { strideOf } from './fit-schedule';
import type { StoredBlock } from './fit-commit';

/** Blocks that are read at once. */
const batch = 64;

/**
 * The stored blocks of one replica in the order of its draws, from the first that begins at `from`; those committed after
 * `draws` recorded draws are left out. Commits end where blocks do, so nothing of an earlier commit begins there.
 */
export async function* fitBlocks(
  fitId: string,
  replica: number,
  draws: number,
  from = 0,
): AsyncGenerator<StoredBlock> {
  let after = from - 1;
  for (;;) {
    const rows = await FitBlock.findAll({
      where: { fitId, replica, firstDraw: { [Op.gt]: after, [Op.lt]: draws } },
      order: [['firstDraw', 'ASC']],
      limit: batch,
    });
    for (const { firstDraw, stride, rows: count, width, values } of rows) {
      const numbers = readDoubles(values, 'block of draws', count * width);
      yield { replica, firstDraw, stride, rows: count, width, values: numbers };
      after = firstDraw;
    }
    if (rows.length < batch) return;
  }
}

/** What is served of a fit at a moment. */
export interface Served {
  warmup: number;
  /** Recorded draws a replica that are committed. */
  draws: number;
}

/** Rows of a block that are served: draws of warm-up all, kept ones on the stride that holds for all that are there. */
export function* servedRows(
  block: StoredBlock,
  { warmup, draws }: Served,
): Generator<{ draw: number; row: number }> {
  const stride = strideOf(draws - warmup);
  for (let row = 0; row < block.rows; row++) {
    const draw = block.firstDraw + row * block.stride;
    if (draw >= draws) return;
    if (draw < warmup || (draw - warmup) % stride === 0) yield { draw, row };
  }
}
