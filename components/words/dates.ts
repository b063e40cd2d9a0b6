const months = [
  'January',
  'February',
  'March',
  'April',
  'May',
  'June',
  'July',
  'August',
  'September',
  'October',
  'November',
  'December',
];

/** Day and month of an instant in UTC: "10 March". */
export function dayAndMonth(iso: string): string {
  const [, month, day] = iso.slice(0, 10).split('-').map(Number);
  return `${day} ${months[month - 1]}`;
}

/** Hour and minute of an instant in UTC: "15:02". */
export function clockTime(iso: string): string {
  return iso.slice(11, 16);
}
