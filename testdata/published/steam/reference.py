#!/usr/bin/env python3
"""Writes reference.json: states by Debian's python3-iapws, for comparison.

    apt-get install python3-iapws
    python3 reference.py > reference.json

Its equations of the regions are taken directly, since its own choice of a
region stands beside the point; for IAPWS-95 it solves for the density.
"""
import json
import random
import subprocess

import iapws
from iapws import iapws97
from iapws._iapws import _ThCond, _Tension, _Viscosity
from iapws.iapws95 import IAPWS95

STATES = 250
COARSE = 80
draw = random.Random(1997)


def state(region):
    """A random state: T in K, p in MPa, and the density of region 3."""
    if region == 1:
        t = draw.uniform(273.16, 623.15)
        low = iapws97._PSat_T(t) * 1.0001
        return t, low * (100 / low) ** draw.random(), None
    if region == 2:
        t = draw.uniform(273.16, 1073.15)
        high = iapws97._PSat_T(t) * 0.9999 if t <= 623.15 else min(iapws97._P23_T(t), 100)
        return t, 1e-4 * (high / 1e-4) ** draw.random(), None
    if region == 5:
        return draw.uniform(1073.15, 2273.15), 1e-4 * (50 / 1e-4) ** draw.random(), None
    while True:
        t, rho = draw.uniform(623.15, 863.15), draw.uniform(110, 760)
        p = iapws97._Region3(rho, t)["P"]
        if not iapws97._P23_T(t) < p < 100:
            continue
        if t < 647.096:
            line = iapws97._PSat_T(t)
            # Off the two-phase zone, by the densities that the library finds.
            if abs(p / line - 1) < 1e-3 or (p > line) != (rho > 322):
                continue
        if iapws97._Region3(rho, t)["kt"] > 0:
            return t, p, rho


def fill(region, t, p, rho):
    if region == 1:
        s = iapws97._Region1(t, p)
    elif region == 2:
        s = iapws97._Region2(t, p)
    elif region == 3:
        s = iapws97._Region3(rho, t)
    else:
        s = iapws97._Region5(t, p)
    pascals = p * 1e6
    row = [region, t, pascals, s["v"], s["h"] * 1e3, s["s"] * 1e3, s["cp"] * 1e3, s["cv"] * 1e3, s["w"],
           s["alfav"] * s["v"], -s["kt"] * s["v"] / 1e6]
    if t > 1173.15:
        return row + [None, None]
    return row + [_Viscosity(1 / s["v"], t), _ThCond(1 / s["v"], t)]


debian = subprocess.run(["dpkg-query", "-W", "-f", "${Version}", "python3-iapws"], capture_output=True, text=True).stdout
out = {
    "library": "python3-iapws " + debian + " of Debian (module version " + iapws.__version__ + ")",
    "script": "reference.py",
    "columns": ["region", "T in K", "p in Pa", "v in m3/kg", "h in J/kg", "s in J/(kg K)", "cp in J/(kg K)", "cv in J/(kg K)",
                "w in m/s", "(dv/dT)p in m3/(kg K)", "(dv/dp)T in m3/(kg Pa)", "viscosity in Pa s",
                "conductivity without enhancement in W/(m K)"],
    "states": [fill(region, *state(region)) for region in (1, 2, 3, 5) for _ in range(STATES)],
    "line_columns": ["T in K", "p in Pa at T", "T in K at that p", "surface tension in N/m"],
    "line": [],
    "iapws95_columns": ["region", "T in K", "p in Pa", "v in m3/kg", "h in J/kg"],
    "iapws95": [],
}
for i in range(STATES):
    t = 273.15 + (647.09 - 273.15) * i / (STATES - 1)
    p = iapws97._PSat_T(t)
    out["line"].append([t, p * 1e6, iapws97._TSat_P(min(p, 22.064)), _Tension(t)])
for region in (1, 2, 3):
    for _ in range(COARSE):
        t, p, _ = state(region)
        s = IAPWS95(T=t, P=p)
        if s.status == 1:
            out["iapws95"].append([region, t, p * 1e6, s.v, s.h * 1e3])
text = json.dumps(out, indent=1)
# A row a line.
print("[".join(part.replace("\n   ", "").replace("\n  ]", "]") for part in text.split("[")))
