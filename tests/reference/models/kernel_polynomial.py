"""The polynomial of engine/models/kernel_loops.hpp's exponential: python3 kernel_polynomial.py prints it.

(exp(r) - 1 - r) / r^2 on |r| <= log(2)/2, degree 10, interpolated at Chebyshev points by mpmath at 40 digits and
rounded to doubles; the error of exp(r) with these is 3e-19, of exp(r) - 1 - r 5e-18, both relative.
"""
from mpmath import chebyfit, exp, expm1, linspace, log, mp, mpf, nstr, polyval

mp.dps = 40
end = log(2) / 2
tail = lambda r: (expm1(r) - r) / r**2 if abs(r) > 1e-12 else mpf(1) / 2 + r / 6
coefficients = [mpf(float(c)) for c in chebyfit(tail, [-end * 1.0001, end * 1.0001], 11)]
points = linspace(-end, end, 2002)
print("error of exp(r):        ", nstr(max(abs((1 + r + r * r * polyval(coefficients, r)) / exp(r) - 1) for r in points), 3))
print("error of exp(r) - 1 - r:", nstr(max(abs(r * r * polyval(coefficients, r) / (expm1(r) - r) - 1) for r in points), 3))
for c in coefficients:
    print(float(c).hex())
