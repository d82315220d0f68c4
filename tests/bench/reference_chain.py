#!/usr/bin/python3
"""Raw text of an open-path station to half-hourly fluxes, with pandas and numpy/scipy.

An independent yardstick for speed and for numbers: written from the published methods, not from the TypeScript code, the way a
scientist at home in numpy would write it (vectorised; pandas' C parser; scipy.fft). Frozen: change it only where it is wrong.

    reference_chain.py DIR --out periods.csv [--jobs 2] [--no-block-average] [--timing]

DIR holds HOF_*.csv[.gz] (three header lines), set-up.json and layout.json as the generator writes them.

Methods: median/MAD despiking (Mauder et al. 2013); screening after Vickers and Mahrt (1997); double rotation; block mean; lag by
covariance maximisation; transfer functions of Moore (1986) with cospectra of Kaimal et al. (1972) after Moncrieff et al. (1997);
density terms of Webb, Pearman and Leuning (1980) coupled with the humidity part of sonic temperature; steady state after Foken and
Wichura (1996); integral turbulence after Foken et al. (2004) and Thomas and Foken (2002); random error after Finkelstein and Sims
(2001), 200 s.
"""
import argparse
import csv
import glob
import json
import math
import multiprocessing
import os
import re
import sys
import time
from datetime import datetime, timedelta

import numpy as np
import pandas as pd
from scipy import fft as sfft

R = 8.314462618
G = 9.80665
KAPPA = 0.40
MD = 0.0289652
MV = 0.01801528
MU = MD / MV
ZERO_C = 273.15
PERIOD_S = 1800
SERIES = ["u", "v", "w", "ts", "co2", "h2o"]
GASES = ["co2", "h2o"]

COLUMNS = ["time", "u", "v", "w", "ts", "co2", "h2o", "p", "sonic_status", "analyser_status", "signal"]


# --------------------------------------------------------------------------------------------------------------- reading

def file_start(path):
    """Station time in the file's name."""
    day, clock = re.search(r"_(\d{8})_(\d{4})\.", os.path.basename(path)).groups()
    return datetime.strptime(day + clock, "%Y%m%d%H%M")


def read_file(path):
    frame = pd.read_csv(path, engine="c", skiprows=3, header=None, names=COLUMNS,
                        na_values=["NaN", "-9999"], dtype={c: np.float64 for c in COLUMNS[1:]})
    frame["time"] = pd.to_datetime(frame["time"], format="%Y-%m-%d %H:%M:%S.%f")
    return frame


def slots(frame, start, rate, n):
    """Samples of one period by slot; the first of two in one slot stays. Counts what the clock did."""
    seconds = (frame["time"].to_numpy() - np.datetime64(start)).astype(np.int64) / 1e9
    inside = (seconds >= -0.5 / rate) & (seconds < PERIOD_S - 0.5 / rate)
    t = seconds[inside]
    k = np.rint(t * rate).astype(np.int64)
    k, first = np.unique(k, return_index=True)
    steps = np.diff(t)
    limit = max(0.5, 5 / rate)
    out = {}
    rows = frame[inside]
    for name in COLUMNS[1:]:
        x = np.full(n, np.nan)
        x[k] = rows[name].to_numpy()[first]
        out[name] = x
    return out, dict(n_read=int(t.size), n_dup=int(t.size - k.size),
                     jumps=int(np.sum(np.abs(steps - 1 / rate) > limit)), backward=int(np.sum(steps < 0)))


# ------------------------------------------------------------------------------------------------------------- screening

def median_mad(x, q=7.0):
    """Points to remove."""
    valid = x[np.isfinite(x)]
    if valid.size == 0:
        return np.zeros(x.size, bool)
    med = np.median(valid)
    mad = np.median(np.abs(valid - med))
    if mad == 0:
        return np.zeros(x.size, bool)
    return np.abs(x - med) > q * mad / 0.6745


def window_tests(x, size=1000, step=500, bins=100):
    """Largest share of empty bins, and longest run in one bin for inner and outer bins, over sliding windows (shares)."""
    view = np.lib.stride_tricks.sliding_window_view(x, size)[::step]
    finite = np.isfinite(view)
    view = view[finite.sum(axis=1) >= size / 2]
    if view.shape[0] == 0:
        return np.nan, np.nan, np.nan
    if np.isnan(view).any():
        results = [window_block(row[np.isfinite(row)][None, :], bins) for row in view]
        return tuple(max(r[i] for r in results) for i in range(3))
    return window_block(view, bins)


def window_block(view, bins):
    rows, size = view.shape
    low, high = view.min(axis=1), view.max(axis=1)
    mean, sd = view.mean(axis=1), view.std(axis=1)
    span = high - low
    gaussian = 7 * sd < span
    start = np.where(gaussian, mean - 3.5 * sd, low)
    width = np.where(gaussian, 7 * sd, span) / bins
    constant = width <= 0
    width[constant] = 1
    index = np.clip(((view - start[:, None]) / width[:, None]).astype(np.int64), 0, bins - 1)
    flat = (index + bins * np.arange(rows)[:, None]).ravel()
    filled = (np.bincount(flat, minlength=rows * bins).reshape(rows, bins) > 0).sum(axis=1)
    empty = 1 - filled / bins
    # Runs: borders are where the bin or the window changes.
    border = np.flatnonzero(np.diff(flat)) + 1
    starts = np.concatenate(([0], border))
    lengths = np.diff(np.concatenate((starts, [flat.size])))
    window = starts // size
    centre = start[window] + (flat[starts] % bins + 0.5) * width[window]
    p10, p90 = np.percentile(view, [10, 90], axis=1)
    outer = (centre < p10[window]) | (centre > p90[window])
    inner_run = lengths[~outer].max() / size if (~outer).any() else 0.0
    outer_run = lengths[outer].max() / size if outer.any() else 0.0
    return float(empty.max()), float(inner_run), float(outer_run)


def detrended(x):
    i = np.flatnonzero(np.isfinite(x))
    t = i - i.mean()
    v = x[i]
    v = v - v.mean()
    return v - t * (t @ v) / (t @ t)


def haar(x, window):
    """Largest difference of neighbouring half windows: mean by min(sigma, range/4), variance by the variance."""
    ok = np.isfinite(x)
    v = x[ok]
    if v.size < window:
        return np.nan, np.nan
    sd = v.std()
    if sd == 0:
        return np.nan, np.nan
    y = np.where(ok, x - np.median(v), 0.0)
    c0 = np.concatenate(([0], np.cumsum(ok)))
    c1 = np.concatenate(([0], np.cumsum(y)))
    c2 = np.concatenate(([0], np.cumsum(y * y)))
    h = window // 2
    n0, n1, n2 = c0[h:] - c0[:-h], c1[h:] - c1[:-h], c2[h:] - c2[:-h]
    with np.errstate(invalid="ignore", divide="ignore"):
        mean = np.where(n0 >= h / 2, n1 / n0, np.nan)
        var = np.maximum(0, n2 / n0 - mean ** 2)
    dm = mean[h:] - mean[:-h]
    dv = var[h:] - var[:-h]
    norm = min(sd, (v.max() - v.min()) / 4)
    return float(np.nanmax(np.abs(dm)) / norm), float(np.nanmax(np.abs(dv)) / v.var())


# ------------------------------------------------------------------------------------------------------------ covariances

def pair_covariance(a, b):
    ok = np.isfinite(a) & np.isfinite(b)
    n = int(ok.sum())
    if n == 0:
        return np.nan, 0
    x, y = a[ok], b[ok]
    return float(np.mean((x - x.mean()) * (y - y.mean()))), n


def shifted(c, lag):
    """c(i + lag) at i; NaN where there is none."""
    out = np.full(c.size, np.nan)
    if lag >= 0:
        out[:c.size - lag] = c[lag:]
    else:
        out[-lag:] = c[:lag]
    return out


class Correlator:
    """Covariances of one series with others at many lags, by FFT with zero padding and validity masks."""

    def __init__(self, w, reach):
        self.n = w.size
        self.reach = reach
        self.size = sfft.next_fast_len(self.n + reach, real=True)
        self.ok = np.isfinite(w)
        self.fw = sfft.rfft(np.where(self.ok, w - np.nanmean(w), 0.0), self.size)
        self.fm = None if self.ok.all() else sfft.rfft(self.ok.astype(float), self.size)

    def curve(self, c):
        """cov(L) for L = -reach .. reach."""
        ok = np.isfinite(c)
        fc = sfft.rfft(np.where(ok, c - np.nanmean(c), 0.0), self.size)
        sums = sfft.irfft(np.conj(self.fw) * fc, self.size)
        lags = np.arange(-self.reach, self.reach + 1)
        if self.fm is None and ok.all():
            counts = self.n - np.abs(lags)
        else:
            fm = sfft.rfft(self.ok.astype(float), self.size) if self.fm is None else self.fm
            counts = np.rint(sfft.irfft(np.conj(fm) * sfft.rfft(ok.astype(float), self.size), self.size))[lags]
        return lags, sums[lags] / np.maximum(counts, 1)


def best_lag(lags, cov, expected, half_window, noise_from, noise_to, factor=3.0):
    window = np.abs(lags - expected) <= half_window
    at = np.flatnonzero(window)
    peak = at[np.argmax(np.abs(cov[at]))]
    noise = cov[(np.abs(lags) >= noise_from) & (np.abs(lags) <= noise_to)].std()
    edge = peak in (at[0], at[-1])
    if edge or abs(cov[peak]) < factor * noise:
        return int(round(expected)), "default"
    return int(lags[peak]), "max"


def random_error(w, c, m):
    """Finkelstein and Sims (2001): standard error of cov(w, c) from auto- and cross-covariances up to m lags."""
    ok = np.isfinite(w) & np.isfinite(c)
    n = int(ok.sum())
    size = sfft.next_fast_len(w.size + m + 1, real=True)
    a = sfft.rfft(np.where(ok, w - w[ok].mean(), 0.0), size)
    b = sfft.rfft(np.where(ok, c - c[ok].mean(), 0.0), size)
    gww = sfft.irfft(np.abs(a) ** 2, size)[:m + 1] / n
    gcc = sfft.irfft(np.abs(b) ** 2, size)[:m + 1] / n
    gwc = sfft.irfft(np.conj(a) * b, size) / n
    forward, back = gwc[:m + 1], np.concatenate(([gwc[0]], gwc[:-m - 1:-1]))
    total = gww[0] * gcc[0] + 2 * (gww[1:] @ gcc[1:]) + forward[0] ** 2 + 2 * (forward[1:] @ back[1:])
    return math.sqrt(max(0.0, total / n))


# ---------------------------------------------------------------------------------------------------- spectral correction

LN_F = np.linspace(math.log(1e-7), math.log(1e4), 2000)
F_NORM = np.exp(LN_F)


def cospectrum(kind, zeta):
    f = F_NORM
    if kind == "momentum":
        unstable = np.where(f < 0.24, 20.78 * f / (1 + 31 * f) ** 1.575, 12.66 * f / (1 + 9.6 * f) ** 2.4)
        a = 0.124 * (1 + 7.9 * min(2.0, max(0.0, zeta))) ** 0.75
    else:
        unstable = np.where(f < 0.54, 12.92 * f / (1 + 26.7 * f) ** 1.375, 4.378 * f / (1 + 3.8 * f) ** 2.4)
        a = 0.284 * (1 + 6.4 * min(2.0, max(0.0, zeta))) ** 0.75
    if zeta <= -0.02:
        return unstable
    stable = f / (a + 2.34 * a ** -1.1 * f ** 2.1)
    if zeta >= 0.02:
        return stable
    share = (zeta + 0.02) / 0.04
    return (1 - share) * unstable + share * stable


def path_w(n, length, speed):
    x = 2 * np.pi * n * length / speed
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        e = np.exp(-x)
        full = 4 / x * (1 + e / 2 - 3 * (1 - e) / (2 * x))
    return np.where(x < 0.02, 1 - x ** 2 / 12 + x ** 3 / 30, full)


def path_s(n, length, speed):
    x = 2 * np.pi * n * length / speed
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        e = np.exp(-x)
        full = (3 + e - 4 * (1 - e) / x) / x
    return np.where(x < 0.02, 1 - x / 6 + x ** 3 / 120, full)


def correction_factor(kind, zeta, speed, zm, set_up, across, residual_lag, block_average):
    n = F_NORM * speed / zm
    tw = path_w(n, set_up["sonic"]["pathLengthM"], speed)
    if kind == "momentum":
        transfer = tw
    elif kind == "heat":
        transfer = np.sqrt(tw * path_s(n, set_up["sonic"]["pathLengthM"], speed))
    else:
        transfer = np.sqrt(tw * path_s(n, set_up["analyser"]["pathLengthM"], speed))
        transfer = transfer * np.exp(-9.9 * (n * abs(across) / speed) ** 1.5)
        # The part of the along-wind delay that whole samples leave over.
        transfer = transfer * np.cos(2 * np.pi * n * residual_lag)
    if block_average:
        y = np.pi * n * PERIOD_S
        transfer = transfer * (1 - np.sinc(y / np.pi) ** 2)
    co = cospectrum("momentum" if kind == "momentum" else "scalar", zeta)
    return float(np.trapz(co, LN_F) / np.trapz(transfer * co, LN_F))


# -------------------------------------------------------------------------------------------------------------- one period

def air_state(ts, p, nv):
    """Mean air from sonic temperature [K], pressure [Pa] and vapour [mol m-3]."""
    t = ts
    for _ in range(8):
        rho_v = nv * MV
        rho_d = (p - nv * R * t) * MD / (R * t)
        q = rho_v / (rho_v + rho_d)
        t = ts / (1 + 0.51 * q)
    rho_v = nv * MV
    rho_d = (p - nv * R * t) * MD / (R * t)
    rho = rho_v + rho_d
    q = rho_v / rho
    return dict(t=t, rho_v=rho_v, rho_d=rho_d, rho=rho, q=q, cp=1004.67 * (1 + 0.84 * q),
                lam=2.501e6 - 2361 * (t - ZERO_C), nd=rho_d / MD)


def integral_models(zeta, ustar, latitude):
    if -0.2 < zeta < 0.4 and abs(latitude) >= 10:
        f = abs(2 * 7.2921159e-5 * math.sin(math.radians(latitude)))
        return 0.21 * math.log(f / ustar) + 3.1, 0.44 * math.log(f / ustar) + 6.3
    if zeta >= 0:
        return None, None
    if zeta > -0.032:
        return 1.3, 2.7
    return 2.0 * abs(zeta) ** 0.125, 4.15 * abs(zeta) ** 0.125


def steady_state(w, c, whole, parts=6):
    size = w.size // parts
    found = []
    for k in range(parts):
        cov, n = pair_covariance(w[k * size:(k + 1) * size], c[k * size:(k + 1) * size])
        if n >= 0.5 * size:
            found.append(cov)
    if len(found) < 4 or whole == 0:
        return np.nan
    return abs((np.mean(found) - whole) / whole)


def grade_of(value, soft, hard):
    if not np.isfinite(value):
        return 0
    return 2 if value > hard else 1 if value > soft else 0


def process(raw, counts, start, set_up, rate, signal_reference, edges, block_average):
    n = PERIOD_S * rate
    row = {"start": start.strftime("%Y-%m-%d %H:%M"), "n": 0}
    flags = []                      # (name, grade, series or instrument)

    def flag(name, grade, series=("u", "w", "ts", "co2", "h2o")):
        if grade:
            flags.append((name, grade, tuple(series)))

    x = {k: raw[k] for k in SERIES}
    # A step back leaves rows in the wrong place.
    flag("clock", 2 if counts["backward"] else 1 if counts["jumps"] else 0)

    # Diagnostics
    present = np.isfinite(raw["sonic_status"])
    bad_sonic = present & (raw["sonic_status"] != 0)
    bad_gas = present & (raw["analyser_status"] != 0)
    bad_gas |= raw["signal"] < signal_reference - 10
    for bad, names, label in ((bad_sonic, ["u", "v", "w", "ts"], "sonic"), (bad_gas, GASES, "analyser")):
        flag("diag_" + label, grade_of(100 * bad.mean(), 10, 30), names)
        for name in names:
            x[name][bad] = np.nan
    # Plausibility
    total = raw["p"] * 1000 / (R * (x["ts"] + ZERO_C))
    limits = {"u": (-50, 50, x["u"]), "v": (-50, 50, x["v"]), "w": (-10, 10, x["w"]), "ts": (-40, 60, x["ts"]),
              "co2": (150, 1500, x["co2"] * 1e3 / total), "h2o": (-1, 60, x["h2o"] / total)}
    for name, (low, high, value) in limits.items():
        out = (value < low) | (value > high)
        flag("limits_" + name, 0 if not out.any() else 2 if out.mean() > 0.01 else 1, [name])
        x[name][out] = np.nan
    # Completeness
    for name in SERIES:
        missing = 1 - np.isfinite(x[name]).mean()
        flag("missing_" + name, 2 if missing > 0.5 else 1 if missing > 0.1 else 0, [name])
        if missing > 0.5:
            x[name][:] = np.nan
    row["n"] = int(np.isfinite(x["w"]).sum())
    if not np.isfinite(x["w"]).any():
        row["flags"] = "not processed"
        return row
    # Despiking
    for name in SERIES:
        spikes = median_mad(x[name])
        flag("spikes_" + name, 2 if spikes.mean() > 0.01 else 0, [name])
        x[name][spikes] = np.nan
    # Screening
    window = 300 * rate
    for name in SERIES:
        series = x[name]
        valid = series[np.isfinite(series)]
        if valid.size < 0.5 * n:
            continue
        if valid.std() <= 1e-12 * max(1, abs(valid.mean())):
            flag("constant_" + name, 2, [name])
            series[:] = np.nan
            continue
        empty, inner, outer = window_tests(series)
        flag("resolution_" + name, 2 if empty > 0.7 else 0, [name])
        flag("dropout_" + name, 2 if inner > 0.10 or outer > 0.06 else 0, [name])
        d = detrended(series)
        m2 = np.mean(d * d)
        d2 = d * d
        skew, kurt = np.mean(d2 * d) / m2 ** 1.5, np.mean(d2 * d2) / m2 ** 2
        flag("skewness_" + name, grade_of(abs(skew), 1, 2), [name])
        flag("kurtosis_" + name, 2 if not 1 <= kurt <= 8 else 1 if not 2 <= kurt <= 5 else 0, [name])
        hm, hv = haar(series, window)
        flag("haar_mean_" + name, grade_of(hm, 2, 3), [name])
        flag("haar_variance_" + name, grade_of(hv, 2, 3), [name])
    ok = np.isfinite(x["u"]) & np.isfinite(x["v"]) & np.isfinite(x["w"])
    u, v, w = (np.where(ok, x[k], np.nan) for k in "uvw")
    attack = np.degrees(np.arctan2(np.abs(w[ok]), np.hypot(u[ok], v[ok])))
    flag("attack_angle", grade_of(100 * np.mean(attack > set_up["sonic"]["acceptanceAngleDeg"]), 5, 20), ["w", "u"])

    # Direction and sector
    um, vm, wm = u[ok].mean(), v[ok].mean(), w[ok].mean()
    direction = (math.degrees(math.atan2(-um, -vm)) + set_up["boomAzimuthDeg"] + 90) % 360
    centre = (set_up["boomAzimuthDeg"] + 180) % 360
    if abs((direction - centre + 540) % 360 - 180) <= set_up["mastSectorHalfWidthDeg"]:
        flag("sector", 2)

    # Double rotation
    yaw = math.atan2(vm, um)
    pitch = math.atan2(wm, math.hypot(um, vm))
    cy, sy, cp, sp = math.cos(yaw), math.sin(yaw), math.cos(pitch), math.sin(pitch)
    ahead = cy * u + sy * v
    u, v, w = cp * ahead + sp * w, -sy * u + cy * v, -sp * ahead + cp * w
    speed = float(u[ok].mean())
    i = np.flatnonzero(ok)
    t = i - i.mean()
    du = (t @ u[ok]) / (t @ t) * (n - 1)
    dv = (t @ v[ok]) / (t @ t) * (n - 1)
    flag("wind_nonstationary", 1 if max(abs(du), abs(dv), math.hypot(du, dv)) / speed > 0.5 else 0, ["u", "w"])

    # Lags
    east, north = set_up["separation"]["eastM"], set_up["separation"]["northM"]
    to_east, to_north = -math.sin(math.radians(direction)), -math.cos(math.radians(direction))
    along, across = east * to_east + north * to_north, north * to_east - east * to_north
    correlator = Correlator(w, 60 * rate)
    expected = along / speed * rate
    aligned, lag = {"ts": x["ts"]}, {"ts": 0}
    for gas in GASES:
        if not np.isfinite(x[gas]).any():
            continue
        lags, curve = correlator.curve(x[gas])
        lag[gas], source = best_lag(lags, curve, expected, 1.0 * rate, 30 * rate, 60 * rate)
        near = np.abs(lags) <= 2 * rate
        top = curve[near][np.argmax(np.abs(curve[near]))]
        flag("lag_" + gas, grade_of(100 * abs((top - curve[lags == 0][0]) / top), 15, 30), [gas])
        if source != "max":
            flag("lag_default_" + gas, 0, [gas])
        aligned[gas] = shifted(x[gas], lag[gas])
        row["lag_" + gas] = lag[gas] / rate

    # Covariances
    uw, _ = pair_covariance(u, w)
    vw, _ = pair_covariance(v, w)
    cov, rn = {}, {}
    m = 200 * rate
    for name, c in aligned.items():
        if not np.isfinite(c).any():
            continue
        cov[name], pairs = pair_covariance(w, c)
        if pairs < 0.5 * n:
            del cov[name]
            continue
        rn[name] = steady_state(w, c, cov[name])
    rn["uw"] = steady_state(w, u, uw)
    for name in SERIES:
        series = {"u": u, "v": v, "w": w}.get(name, x.get(name))
        row["sigma_" + name] = float(np.nanstd(series)) if np.isfinite(series).any() else np.nan

    # Means, in SI
    zm = set_up["sonicHeightM"] - set_up["displacementM"]
    pressure = float(np.nanmean(raw["p"])) * 1000
    ts = float(np.nanmean(x["ts"])) + ZERO_C if np.isfinite(x["ts"]).any() else np.nan
    nv = float(np.nanmean(x["h2o"])) * 1e-3 if np.isfinite(x["h2o"]).any() else np.nan
    nc = float(np.nanmean(x["co2"])) * 1e-3 if np.isfinite(x["co2"]).any() else np.nan
    air = air_state(ts, pressure, nv if np.isfinite(nv) else 0.0)

    # Spectral factors, density terms and stability together
    a0 = cov.get("ts", np.nan)
    b0 = cov.get("h2o", np.nan) * 1e-3 * MV
    c0 = cov.get("co2", np.nan) * 1e-3
    ustar = (uw * uw + vw * vw) ** 0.25
    zeta = zm * -KAPPA * G * a0 / (ts * ustar ** 3) if np.isfinite(a0) else 0.0
    sigma = air["rho_v"] / air["rho_d"]
    gain = 1 + MU * sigma
    humid = 0.51 * air["t"] * (1 - air["q"]) / air["rho"]
    residual = {g: (along / speed - lag[g] / rate + 0.5 / rate) % (1 / rate) - 0.5 / rate for g in GASES if g in lag}
    for _ in range(10):
        cf_m = correction_factor("momentum", zeta, speed, zm, set_up, across, 0, block_average)
        cf_t = correction_factor("heat", zeta, speed, zm, set_up, across, 0, block_average)
        cf = {g: correction_factor("gas", zeta, speed, zm, set_up, across, residual[g], block_average) for g in residual}
        us = math.sqrt(cf_m) * ustar
        a, b, c = cf_t * a0, cf.get("h2o", np.nan) * b0, cf.get("co2", np.nan) * c0
        if np.isfinite(b):
            wt = (a - humid * gain * b) / (1 + 0.51 * air["q"] + humid * gain * air["rho_v"] / air["t"])
            evaporation = gain * (b + air["rho_v"] / air["t"] * wt)
            wtv = wt * (1 + 0.61 * air["q"]) + 0.61 * air["t"] * (1 - air["q"]) * evaporation / air["rho"]
        else:
            wt, evaporation, wtv = a, np.nan, a
        virtual = air["t"] * (1 + 0.61 * air["q"])
        length = -virtual * us ** 3 / (KAPPA * G * wtv) if np.isfinite(wtv) and wtv != 0 else np.nan
        new = zm / length if np.isfinite(length) else 0.0
        change = abs(new - zeta)
        zeta = new
        if change < 0.001 or change < 0.01 * abs(zeta):
            break
    vapour_term = MU * (nc / air["rho_d"]) * b
    heat_term = gain * nc / air["t"] * wt

    # Every flux is the covariance of w with one combination of scalars, so the sampling error of that covariance is its error.
    error = {"u": random_error(w, u, m)}
    part = {name: c - np.nanmean(x[name]) for name, c in aligned.items() if name in cov}
    if "ts" in part:
        if np.isfinite(b):
            per_vapour = cf["h2o"] * 1e-3 * MV
            by = 1 + 0.51 * air["q"] + humid * gain * air["rho_v"] / air["t"]
            vapour = per_vapour * part["h2o"]
            as_heat = cf_t * part["ts"] / by
            # A sample without vapour counts as the mean where the term is only a correction.
            error["ts"] = random_error(w, as_heat - humid * gain / by * np.nan_to_num(vapour, nan=0.0), m)
            temperature = as_heat - humid * gain / by * vapour
            error["h2o"] = random_error(w, gain * (vapour + air["rho_v"] / air["t"] * temperature), m)
            if np.isfinite(c):
                co2 = cf["co2"] * 1e-3 * part["co2"]
                error["co2"] = random_error(
                    w, co2 + MU * nc / air["rho_d"] * vapour + gain * nc / air["t"] * temperature, m)
        else:
            error["ts"] = random_error(w, cf_t * part["ts"], m)
    row.update(
        ustar=us, H=air["rho"] * air["cp"] * wt, LE=air["lam"] * evaporation, FC=1e6 * (c + vapour_term + heat_term),
        wT=wt, E=evaporation, zeta=zeta, L=length, wind_speed=speed, wind_dir=direction, t_air=air["t"],
        cf_tau=cf_m, cf_H=cf_t, cf_h2o=cf.get("h2o", np.nan), cf_co2=cf.get("co2", np.nan),
        cov_uw=uw, cov_vw=vw, cov_wts=a0, cov_wh2o=cov.get("h2o", np.nan), cov_wco2=cov.get("co2", np.nan),
        rn_tau=rn["uw"], rn_H=rn.get("ts", np.nan), rn_LE=rn.get("h2o", np.nan), rn_FC=rn.get("co2", np.nan),
        ru_ustar=cf_m * error["u"] / (2 * us),
        ru_H=air["rho"] * air["cp"] * error.get("ts", np.nan),
        ru_LE=air["lam"] * error.get("h2o", np.nan),
        ru_FC=1e6 * error.get("co2", np.nan),
    )
    # Storage below the sensor from short means around the two boundaries
    if edges is not None:
        row["SC"] = air["nd"] * set_up["sonicHeightM"] * (edges[1] - edges[0]) / PERIOD_S

    # Integral turbulence
    model_w, model_u = integral_models(zeta, us, set_up["latitudeDeg"]) if us >= 0.01 else (None, None)
    itc_w = abs(model_w - row["sigma_w"] / us) / model_w if model_w else np.nan
    itc_u = abs(model_u - row["sigma_u"] / us) / model_u if model_u else np.nan
    row["itc_w"], row["itc_u"] = itc_w, itc_u

    # Grades
    if not np.isfinite(b):
        flag("no_humidity", 1, ["ts"])

    def grade(steady, itc, series, flux):
        if not np.isfinite(flux):
            return 2
        worst = [grade_of(100 * steady, 30, 100), grade_of(100 * itc, 30, 100)]
        worst += [g for _, g, touched in flags if set(touched) & set(series)]
        return max(worst)

    row["q_tau"] = grade(rn["uw"], np.nanmax([itc_u, itc_w]) if model_w else np.nan, ["u", "w"], us)
    row["q_H"] = grade(rn.get("ts", np.nan), itc_w, ["w", "ts"], row["H"])
    row["q_LE"] = grade(rn.get("h2o", np.nan), itc_w, ["w", "h2o"], row["LE"])
    # The density terms of FC need H2O.
    row["q_FC"] = grade(rn.get("co2", np.nan), itc_w, ["w", "co2", "h2o"], row["FC"])
    row["flags"] = " ".join(f"{name}:{g}" for name, g, _ in flags)
    return row


def dry_fraction(frame, at, half_width, rate):
    """Mean dry mole fraction of CO2 [umol/mol] around an instant, or None."""
    t = frame["time"].to_numpy()
    centre = np.datetime64(at)
    i, j = np.searchsorted(t, [centre - np.timedelta64(half_width), centre + np.timedelta64(half_width)])
    middle = np.searchsorted(t, centre)
    good = frame["analyser_status"].to_numpy()[i:j] == 0
    # Half of either side at least: a mean of one side alone does not belong to the boundary.
    fewest = 0.5 * rate * half_width.total_seconds()
    if good[:middle - i].sum() < fewest or good[middle - i:].sum() < fewest:
        return None
    part = frame.iloc[i:j][good]
    mean = part[["ts", "co2", "h2o", "p"]].mean()
    nv = mean["h2o"] * 1e-3
    air = air_state(mean["ts"] + ZERO_C, mean["p"] * 1e3, nv)
    return mean["co2"] * 1e-3 / air["nd"] * 1e6


# --------------------------------------------------------------------------------------------------------------- the span

def span_of_day(task):
    """All periods of a span of the day: reads the files that touch it, then works period by period."""
    files, first, last, set_up, rate, block_average = task
    began = time.perf_counter()
    margin = timedelta(minutes=3)
    starts = [file_start(f) for f in files] + [datetime.max]
    wanted = [f for k, f in enumerate(files) if starts[k] < last + margin and starts[k + 1] > first - margin]
    frame = pd.concat([read_file(f) for f in wanted], ignore_index=True)
    parsed = time.perf_counter()
    signal_reference = np.nanpercentile(frame["signal"].to_numpy(), 95)
    n = PERIOD_S * rate
    rows = []
    times = frame["time"].to_numpy()
    order = np.maximum.accumulate(times)
    start = first
    half_width = timedelta(minutes=2.5)
    while start < last:
        # Rows near the period; the running maximum of the stamps is sorted even where a clock was set back.
        i = np.searchsorted(order, np.datetime64(start - timedelta(seconds=60)))
        j = np.searchsorted(order, np.datetime64(start + timedelta(seconds=PERIOD_S + 60)))
        raw, counts = slots(frame.iloc[i:j], start, rate, n)
        before = dry_fraction(frame, start, half_width, rate)
        after = dry_fraction(frame, start + timedelta(seconds=PERIOD_S), half_width, rate)
        edges = None if before is None or after is None else (before, after)
        rows.append(process(raw, counts, start, set_up, rate, signal_reference, edges, block_average))
        start += timedelta(seconds=PERIOD_S)
    return rows, parsed - began, time.perf_counter() - parsed


OUTPUT = ["start", "n", "ustar", "H", "LE", "FC", "SC", "wT", "E", "zeta", "L", "lag_co2", "lag_h2o", "rn_tau", "rn_H", "rn_LE", "rn_FC",
          "itc_w", "itc_u", "sigma_u", "sigma_v", "sigma_w", "sigma_ts", "sigma_co2", "sigma_h2o", "ru_ustar", "ru_H", "ru_LE",
          "ru_FC",
          "cf_tau", "cf_H", "cf_h2o", "cf_co2", "cov_uw", "cov_vw", "cov_wts", "cov_wh2o", "cov_wco2", "wind_speed", "wind_dir", "t_air",
          "q_tau", "q_H", "q_LE", "q_FC", "flags"]


def main():
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("folder")
    parser.add_argument("--out", default="-")
    parser.add_argument("--jobs", type=int, default=1)
    parser.add_argument("--no-block-average", action="store_true", help="leave the block-average factor out")
    parser.add_argument("--timing", action="store_true", help="seconds for reading and computing on standard error")
    options = parser.parse_args()

    files = sorted(glob.glob(os.path.join(options.folder, "HOF_*.csv*")), key=file_start)
    if not files:
        parser.error("no HOF_*.csv files in " + options.folder)
    with open(os.path.join(options.folder, "set-up.json")) as handle:
        set_up = json.load(handle)
    with open(os.path.join(options.folder, "layout.json")) as handle:
        rate = int(json.load(handle)["sampleRateHz"])
    first = file_start(files[0])
    with_last = read_last_stamp(files[-1])
    periods = math.ceil((with_last - first).total_seconds() / PERIOD_S)
    cuts = [first + timedelta(seconds=PERIOD_S * (periods * k // options.jobs)) for k in range(options.jobs + 1)]
    tasks = [(files, cuts[k], cuts[k + 1], set_up, rate, not options.no_block_average) for k in range(options.jobs)]
    if options.jobs == 1:
        results = [span_of_day(tasks[0])]
    else:
        with multiprocessing.Pool(options.jobs) as pool:
            results = pool.map(span_of_day, tasks)
    target = sys.stdout if options.out == "-" else open(options.out, "w", newline="")
    writer = csv.DictWriter(target, OUTPUT, restval="nan", extrasaction="ignore")
    writer.writeheader()
    for rows, _, _ in results:
        for row in rows:
            writer.writerow({k: repr(float(v)) if isinstance(v, (float, np.floating)) else v for k, v in row.items()})
    if target is not sys.stdout:
        target.close()
    if options.timing:
        for k, (_, reading, computing) in enumerate(results):
            print(f"job {k + 1}: reading {reading:.2f} s, computing {computing:.2f} s", file=sys.stderr)


def read_last_stamp(path):
    """Stamp of the last row of a file."""
    opener = __import__("gzip").open if path.endswith(".gz") else open
    with opener(path, "rb") as handle:
        if path.endswith(".gz"):
            tail = handle.read()[-400:]
        else:
            handle.seek(-400, os.SEEK_END)
            tail = handle.read()
    return datetime.strptime(tail.decode().strip().splitlines()[-1].split(",")[0], "%Y-%m-%d %H:%M:%S.%f")


if __name__ == "__main__":
    main()
