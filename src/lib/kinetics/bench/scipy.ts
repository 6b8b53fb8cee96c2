/** The same work in NumPy and SciPy, as a program that prints one JSON object of microseconds, best of several. */
export const SCIPY_PROGRAM = `
import json, time
import numpy as np
import scipy
import scipy.linalg as sl

def best(work, repeats):
    work()
    low = float("inf")
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        low = min(low, time.perf_counter() - start)
    return low * 1e6

def matrix(n, arrows):
    K = np.zeros((n, n))
    for i, j, k in arrows:
        K[j, i] += k
        K[i, i] -= k
    return K

k = [x / 60 for x in (5.93e-5, 2.96e-5, 2.05e-5, 2.744e-4, 4.0e-5)]
K = matrix(5, [(0, 1, k[0]), (0, 2, k[1]), (2, 3, k[2]), (2, 4, k[3]), (4, 2, k[4])])
c0 = np.array([100.0, 0, 0, 0, 0])
t = np.linspace(0, 36420 * 60, 2000)

def per_time():
    return np.array([sl.expm(K * s) @ c0 for s in t])

def eig_once():
    w, V = np.linalg.eig(K)
    return (np.exp(np.outer(t, w)) * np.linalg.solve(V, c0)) @ V.T

print(json.dumps({
    "versions": "NumPy %s, SciPy %s" % (np.__version__, scipy.__version__),
    "expm": best(per_time, 5),
    "eig": best(eig_once, 300),
}))
`;
