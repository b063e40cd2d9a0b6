/**
 * Moves places apart (pixels, any order) until neighbours are at least `gap` away from each other, keeping their order and the
 * mean of each crowd. Places that aren't finite stay as they are. Values: as many as given, in the order given.
 */
export function spread(places: readonly number[], gap: number): number[] {
  const order = places.flatMap((place, i) => (Number.isFinite(place) ? [i] : []));
  order.sort((a, b) => places[a] - places[b] || a - b);
  const crowds: { sum: number; members: number[] }[] = [];
  const first = ({ sum, members }: { sum: number; members: number[] }) =>
    sum / members.length - ((members.length - 1) * gap) / 2;
  for (const i of order) {
    crowds.push({ sum: places[i], members: [i] });
    while (crowds.length > 1) {
      const [before, last] = crowds.slice(-2);
      if (first(before) + before.members.length * gap <= first(last)) break;
      crowds.splice(-2, 2, { sum: before.sum + last.sum, members: [...before.members, ...last.members] });
    }
  }
  const moved = [...places];
  for (const crowd of crowds) {
    const start = first(crowd);
    crowd.members.forEach((i, n) => {
      moved[i] = start + n * gap;
    });
  }
  return moved;
}
