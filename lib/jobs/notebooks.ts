/** Channel on which every change of a notebook is told, and who comes and goes. */
export const notebookChannel = (notebookId: string): string => `notebook:${notebookId}`;
