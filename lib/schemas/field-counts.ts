/** Numbers of fields that are compared where none are named. Apart from the schemas, so that pages needn't load those. */
export const defaultFieldCounts: readonly number[] = [0, 1, 2];

/** The most fields that there can be. */
export const mostFields = 4;
