/** Name under which the rank of the log-likelihood at the truth stands among those of the parameters. */
export const LOG_LIKELIHOOD = 'log likelihood';
