"""The same measures of a loop-week as bench/numerics.ts, with numpy and scipy as one would write them there.
usage: numerics.py FILE REPEATS   (FILE: float64, little endian: n values each of sp, pv, op) -> JSON on the last line"""
import json, sys, time
import numpy as np
from scipy import fft, signal

def measures(sp, pv, op):
    e = sp - pv
    out = {
        'iae': np.mean(np.abs(e)), 'offset': np.mean(e), 'deviation': np.std(pv, ddof=1), 'inTolerance': np.mean(np.abs(e) <= 1.0),
        'travel': np.sum(np.abs(np.diff(op))), 'saturated': np.mean((op <= 0.5) | (op >= 99.5)),
    }
    d = e - e.mean()
    n = len(d)
    size = fft.next_fast_len(n + 2000, real=True)
    f = fft.rfft(d, size)
    c = fft.irfft(np.abs(f) ** 2, size)[:2001] / n
    r = c / c[0]
    order = 30
    X = np.lib.stride_tricks.sliding_window_view(d, order + 1)[:, ::-1]
    P = X.T @ X
    best = (n * np.log(P[0, 0] / n), 0, None)
    for m in range(1, order + 1):
        a = np.linalg.solve(P[1:m + 1, 1:m + 1], P[1:m + 1, 0])
        v = (P[0, 0] - a @ P[1:m + 1, 0]) / (n - order)
        aic = n * np.log(v) + 2 * m
        if aic < best[0]:
            best = (aic, m, v)
    hz, power = signal.welch(d, fs=0.1, window='hann', nperseg=2048, noverlap=1024, detrend='constant')
    out.update(r1=r[1], r2000=r[2000], innovation=best[2], peak=float(power.max()), peakAt=float(hz[power.argmax()]))
    return {k: float(v) for k, v in out.items()}

x = np.fromfile(sys.argv[1])
n = len(x) // 3
sp, pv, op = x[:n].copy(), x[n:2 * n].copy(), x[2 * n:].copy()
times = []
for _ in range(int(sys.argv[2]) + 1):
    t = time.perf_counter()
    result = measures(sp, pv, op)
    times.append((time.perf_counter() - t) * 1000)
print(json.dumps({'ms': sorted(times[1:])[(len(times) - 1) // 2], 'result': result}))
