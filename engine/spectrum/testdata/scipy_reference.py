# Reference values for Welch and for the refinement of peaks, made by SciPy 1.10.1 and
# NumPy 1.24.2 (python3 scipy_reference.py > scipy_reference.csv). The samples come from
# a formula that Go repeats exactly; nothing is read from a file.
import numpy as np
from scipy import signal, optimize

rate, n = 200.0, 4096
i = np.arange(n)
x = (np.exp(-0.3 * i / rate) * np.cos(2 * np.pi * 7.3 * i / rate + 0.4)
     + 0.5 * np.exp(-0.8 * i / rate) * np.cos(2 * np.pi * 22.9 * i / rate - 1.0)
     + 0.01 * np.sin(0.7 * (i * i % 100003)))
f, p = signal.welch(x, rate, window="hann", nperseg=512, noverlap=256, detrend="constant", scaling="density")
print("# welch: kind,index,value")
for k in range(0, 257, 4):
    print("welch,%d,%.12e" % (k, p[k]))

def model(q):
    t = i / rate
    return sum(np.exp(-q[3 * k + 1] * t) * (q[6 + k] * np.cos(2 * np.pi * q[3 * k] * t) + q[8 + k] * np.sin(2 * np.pi * q[3 * k] * t)) for k in range(2)) - x

q0 = np.array([7.3, 0.3, 0, 22.9, 0.8, 0, 0.9, 0.3, -0.4, 0.4])
q = optimize.least_squares(model, q0, xtol=1e-15, ftol=1e-15, gtol=1e-15, x_scale=np.maximum(np.abs(q0), 0.1)).x
print("# least squares over the whole record: frequency (Hz) and decay (1/s)")
for k in range(2):
    print("frequency,%d,%.9f" % (k, q[3 * k]))
    print("decay,%d,%.9f" % (k, q[3 * k + 1]))
