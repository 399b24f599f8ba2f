"""Reference record of a struck line by SciPy's DOP853 (Hairer, Norsett, Wanner).

Two segments with a clamp between them (mass, and a dashpot behind a bracket that gives),
a spring as far support, a half-sine push. The line is a chain of cells of 0.2, 0.1, 0.05 and
0.025 m with lumped masses (second order); the records of successive chains are extrapolated
twice, which leaves an error of sixth order as long as the data are smooth enough; the half
sine's corners leave less. The change by the last extrapolation is written beside each value
as the reference's own error. Invented line.

usage: python3 scipy_reference.py > scipy_reference.csv     (needs SciPy)
"""
import sys
import numpy as np
import scipy
from scipy.integrate import solve_ivp

T = 12000.0                                     # N
L1, M1, L2, M2 = 18.0, 0.9, 27.0, 1.6           # m, kg/m
M, C, KB = 2.5, 80.0, 60e3                      # kg, N s/m, N/m: clamp, dashpot, its bracket
KE = 30e3                                       # N/m, far support
F0, DUR, AT, SEE = 400.0, 0.040, 7.2, 9.0       # N, s, m into segment 1, m into segment 2
END, EVERY = 0.8, 0.005                         # s


def record(h):
    n1, n2 = round(L1 / h), round(L2 / h)
    n = n1 + n2                                 # unknowns 1 .. n; place 0 is held
    mass = np.zeros(n + 1)
    mass[:n1] += M1 * h / 2
    mass[1:n1 + 1] += M1 * h / 2
    mass[n1:n] += M2 * h / 2
    mass[n1 + 1:] += M2 * h / 2
    mass[n1] += M
    hit, see = round(AT / h), n1 + round(SEE / h)

    def rate(t, y):
        u = np.concatenate(([0.0], y[:n]))
        v, q = y[n:2 * n], y[-1]
        pull = T / h * np.diff(u)               # T u' in each cell
        force = np.zeros(n + 1)
        force[:-1] += pull
        force[1:] -= pull
        if t < DUR:
            force[hit] += F0 * np.sin(np.pi * t / DUR)
        force[n1] -= KB * (u[n1] - q)
        force[n] -= KE * u[n]
        return np.concatenate((v, force[1:] / mass[1:], [KB * (u[n1] - q) / C]))

    times = np.arange(0, END + EVERY / 2, EVERY)
    out = np.zeros((len(times), 2))
    y, done = np.zeros(2 * n + 1), 0
    for a, b in ((0.0, DUR), (DUR, END)):       # the integrator stops at the push's corner
        at = times[(times > a) & (times <= b + 1e-12)]
        s = solve_ivp(rate, (a, b), y, method="DOP853", rtol=1e-11, atol=1e-14, t_eval=np.minimum(at, b))
        if not s.success:
            sys.exit(s.message)
        out[done + 1:done + 1 + len(at), 0] = s.y[n1 - 1]
        out[done + 1:done + 1 + len(at), 1] = s.y[see - 1]
        done += len(at)
        y = s.y[:, -1]
    return times, out


runs = [record(h) for h in (0.2, 0.1, 0.05, 0.025)]
times = runs[0][0]
once = [(4 * runs[i + 1][1] - runs[i][1]) / 3 for i in range(3)]
twice = [(16 * once[i + 1] - once[i]) / 15 for i in range(2)]
best, error = twice[1], np.abs(twice[1] - twice[0])
print(f"# SciPy {scipy.__version__}, NumPy {np.__version__}; columns: time [s], clamp [m], its error [m], see [m], its error [m]")
for t, b, e in zip(times, best, error):
    print(f"{t:.3f},{b[0]:.12e},{e[0]:.2e},{b[1]:.12e},{e[1]:.2e}")
