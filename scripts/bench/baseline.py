"""What the benchmark is compared with: an affine-invariant ensemble sampler of general purpose (Goodman and Weare 2010; Debian's
python3-emcee) on the same posterior, its likelihood vectorised over the walkers, started at the parameters that were put in.
Usage: baseline.py FILE STEPS SEED. Prints JSON. Run with OPENBLAS_NUM_THREADS=1."""

import json
import sys
import time

import emcee
import numpy as np

with open(sys.argv[1]) as file:
    posterior = json.load(file)
steps, seed, walkers = int(sys.argv[2]), int(sys.argv[3]), 64
kappa = np.array(posterior["kappa"])
log_kappa, root = np.log(kappa), np.sqrt(kappa)
data = np.array(posterior["S"])
whiten = np.linalg.inv(np.linalg.cholesky(np.array(posterior["covariance"]))).T
low = np.array([0.3, 0.3, 0, -np.pi, 0, -np.pi, -3, -3])
high = np.array([8, 8, 3, np.pi, 3, np.pi, 3, 3])


def log_density(points):
    mu1, mu2, a1, phi1, a2, phi2, c1, c2 = (points[:, j, None] for j in range(8))
    waves = a1 * np.cos(mu1 * log_kappa + phi1) + a2 * np.cos(mu2 * log_kappa + phi2)
    residual = (data - root * waves - c1 * kappa - c2 * kappa**2) @ whiten
    inside = ((points > low) & (points < high)).all(axis=1) & (points[:, 0] < points[:, 1])
    return np.where(inside, -0.5 * (residual**2).sum(axis=1), -np.inf)


generator = np.random.default_rng(seed)
start = np.array(list(posterior["truth"].values())) + 0.01 * generator.standard_normal((walkers, 8))
sampler = emcee.EnsembleSampler(walkers, 8, log_density, vectorize=True)
begun = time.process_time()
sampler.run_mcmc(start, steps)
cpu = time.process_time() - begun
chain = sampler.get_chain(discard=steps // 4)
print(json.dumps({
    "cpuSeconds": cpu,
    "evaluationsPerCpuSecond": walkers * steps / cpu,
    # Walker by walker, so that the caller can take the same effective size of both.
    "chains": [[chain[:, w, j].round(7).tolist() for w in range(0, walkers, 4)] for j in range(8)],
    "share": 0.25,
    "mean": chain.reshape(-1, 8).mean(axis=0).tolist(),
    "sd": chain.reshape(-1, 8).std(axis=0).tolist(),
}))
