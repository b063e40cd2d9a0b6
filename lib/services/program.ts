import packageFile from '@/package.json';

/** What draws depend on beside a fit's settings. */
export const program = {
  program: packageFile.version,
  node: process.version,
  architecture: process.arch,
} as const;
