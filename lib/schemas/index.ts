export * from './shared';
export * from './priors';
export * from './templates';
export * from './measurements';
export * from './notebooks';
export * from './fits';
export * from './groups';
export * from './tokens';
