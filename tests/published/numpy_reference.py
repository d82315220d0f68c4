#!/usr/bin/python3
"""Independent reference for one block: covariances, double rotation, spectra, density terms and loss factors by numpy and scipy.

Usage: numpy_reference.py block.csv  ->  JSON on standard output.
Nothing here is shared with the TypeScript chain: rotation through composed matrices, covariances through numpy.cov, lag by brute force,
temperature by root finding, density terms from the flux of dry air instead of the published closed form, spectra by scipy.signal.
"""
import json
import sys

import numpy as np
from scipy import integrate, optimize, signal

R, MD, MV, CPD = 8.314462618, 0.0289652, 0.01801528, 1004.67
RATE, PRESSURE = 20.0, 98700.0

table = np.genfromtxt(sys.argv[1], delimiter=",", names=True, filling_values=np.nan)
u, v, w = (np.array(table[name]) for name in ("u", "v", "w"))
ts, co2, h2o = np.array(table["Ts"]), np.array(table["co2"]) * 1e-3, np.array(table["h2o"]) * 1e-3


def cov(x, y):
    """Population covariance over the pairs where both are valid."""
    good = np.isfinite(x) & np.isfinite(y)
    return float(np.cov(x[good], y[good], bias=True)[0, 1])


def lagged(x, y, lag):
    n = len(x)
    return cov(x[: n - lag], y[lag:]) if lag >= 0 else cov(x[-lag:], y[: n + lag])


yaw = np.arctan2(v.mean(), u.mean())
turn = np.array([[np.cos(yaw), np.sin(yaw), 0], [-np.sin(yaw), np.cos(yaw), 0], [0, 0, 1]])
mean = turn @ np.array([u.mean(), v.mean(), w.mean()])
pitch = np.arctan2(mean[2], mean[0])
lean = np.array([[np.cos(pitch), 0, np.sin(pitch)], [0, 1, 0], [-np.sin(pitch), 0, np.cos(pitch)]])
rotation = lean @ turn
# Covariances through the matrix, not through rotated samples.
stress = rotation @ np.cov(np.vstack([u, v, w]), bias=True) @ rotation.T
ur, vr, wr = rotation @ np.vstack([u, v, w])

lags = {}
for name, gas in (("co2", co2), ("h2o", h2o)):
    window = range(-20, 21)
    values = [lagged(wr, gas, lag) for lag in window]
    best = int(np.argmax(np.abs(values)))
    lags[name] = {"lag": list(window)[best], "covariance": values[best]}

# Mean state: temperature as the root of T (1 + 0.51 q(T)) = Ts.
nv, nc, sonic = float(np.nanmean(h2o)), float(np.nanmean(co2)), float(ts.mean())


def humidity(t):
    nd = PRESSURE / (R * t) - nv
    return nv * MV / (nv * MV + nd * MD)


t = optimize.brentq(lambda x: x * (1 + 0.51 * humidity(x)) - sonic, 200, 350, xtol=1e-13, rtol=1e-15)
q = humidity(t)
nd = PRESSURE / (R * t) - nv
rho_d, rho_v = nd * MD, nv * MV
rho = rho_d + rho_v

# Two equations for the two unknowns w'T' and w̄. Dry air does not move on average: w'nd' + w̄ nd = 0, with
# nd' = -(n/T) T' - nv' at constant pressure; sonic temperature carries w'q' = E (1 - q)/rho, E = Mv (w'nv' + w̄ nv).
a, b = cov(wr, ts), lags["h2o"]["covariance"]
n = nd + nv
left = np.array([[1 + 0.51 * q, 0.51 * t * (1 - q) / rho * MV * nv], [-n / t, nd]])
right = np.array([a - 0.51 * t * (1 - q) / rho * MV * b, b])
heat, mean_w = np.linalg.solve(left, right)
evaporation = MV * (b + mean_w * nv)
carbon = lags["co2"]["covariance"] + mean_w * nc


def co_stable(f, zeta):
    coefficient = 0.284 * (1 + 6.4 * zeta) ** 0.75
    return f / (coefficient + 2.34 * coefficient**-1.1 * f**2.1)


def co_unstable(f):
    return 12.92 * f / (1 + 26.7 * f) ** 1.375 if f < 0.54 else 4.378 * f / (1 + 3.8 * f) ** 2.4


def loss(co, zm, speed, path_w, path_s, separation, block):
    def transfer(f):
        x = 2 * np.pi * f * path_w / zm
        tw = 1 - x * x / 12 if x < 1e-3 else 4 / x * (1 + np.exp(-x) / 2 - 3 * (1 - np.exp(-x)) / (2 * x))
        x = 2 * np.pi * f * path_s / zm
        tp = 1 - x / 6 if x < 1e-4 else (3 + np.exp(-x) - 4 * (1 - np.exp(-x)) / x) / x
        y = f * speed / zm * block
        return np.sqrt(tw * tp) * np.exp(-9.9 * (f * separation / zm) ** 1.5) * (1 - np.sinc(y) ** 2)

    ends = np.log([1e-7, 1e-4, 1e-3, 1e-2, 0.1, 0.54, 3, 30, 1e4])
    whole = kept = 0.0
    for low, high in zip(ends[:-1], ends[1:]):
        whole += integrate.quad(lambda s: co(np.exp(s)), low, high, epsabs=1e-11, limit=500)[0]
        kept += integrate.quad(lambda s: co(np.exp(s)) * transfer(np.exp(s)), low, high, epsabs=1e-11, limit=2000)[0]
    return whole / kept


frequency, power = signal.periodogram(ts, RATE, "boxcar", detrend="constant")
_, cross = signal.csd(wr, ts, RATE, "boxcar", nperseg=len(ts), detrend="constant")
lines = [1, 2, 7, 50, 333, 1000, 1500]

json.dump(
    {
        "numpy": np.__version__,
        "yaw": float(yaw),
        "pitch": float(pitch),
        "meanU": float(ur.mean()),
        "uu": float(stress[0, 0]),
        "vv": float(stress[1, 1]),
        "ww": float(stress[2, 2]),
        "uw": float(stress[0, 2]),
        "vw": float(stress[1, 2]),
        "wTs": a,
        "lags": lags,
        "lines": lines,
        "frequency": [float(frequency[k]) for k in lines],
        "powerTs": [float(power[k]) for k in lines],
        "cospectrum": [float(cross[k].real) for k in lines],
        "quadrature": [float(cross[k].imag) for k in lines],
        "temperatureK": float(t),
        "specificHumidity": float(q),
        "airDensity": float(rho),
        "temperatureFlux": float(heat),
        "evaporation": float(evaporation),
        "co2Flux": float(carbon),
        "densityMeanW": float(mean_w),
        "sensibleHeat": float(rho * CPD * (1 + 0.84 * q) * heat),
        "lossUnstable": float(loss(co_unstable, 2.9, 3.4, 0.1, 0.125, 0.15, 1800)),
        "lossStable": float(loss(lambda f: co_stable(f, 0.3), 2.9, 3.4, 0.1, 0.125, 0.15, 1800)),
    },
    sys.stdout,
)
