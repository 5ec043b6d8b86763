/** Totals within this part of the smallest of their block are one concentration: what weighing and mixing scatter, not a level of its own. */
const WIDTH = 0.05;

/**
 * Sorts total concentrations into blocks no wider than 5 %.
 * @param totals mol/L, above 0
 * @returns for each total the block it lies in, e.g. `1.83 mol/L` or `1.57 to 1.62 mol/L`
 */
export function totalBlocks(totals: readonly number[]): string[] {
  const blocks: number[][] = [];
  for (const total of totals.toSorted((a, b) => a - b)) {
    const last = blocks.at(-1);
    if (last && total <= last[0]! * (1 + WIDTH)) last.push(total);
    else blocks.push([total]);
  }
  const names = new Map(blocks.flatMap((block) => block.map((total) => [total, nameOf(block)] as const)));
  return totals.map((total) => names.get(total)!);
}

function nameOf(block: readonly number[]): string {
  const [least, most] = [block[0]!.toPrecision(3), block.at(-1)!.toPrecision(3)];
  return least === most ? `${least} mol/L` : `${least} to ${most} mol/L`;
}
