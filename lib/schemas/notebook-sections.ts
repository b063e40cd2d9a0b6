/** What a revision of a notebook can have changed. Apart from the schemas, so that pages can ask without their library. */
export const notebookSections = ['title', 'measurement', 'template', 'priors', 'statement'] as const;
export type NotebookSection = (typeof notebookSections)[number];
/** Those that a fit freezes: a change of one makes it a fit of an earlier revision. */
export const settingSections: readonly NotebookSection[] = ['measurement', 'template', 'priors'];
