# tests/reference/rates/limits.py -- writes limits.tsv: limits for one rate to 16 digits of 30 or more.
#
# Each method's defining equation is solved in mpmath at 50 digits from tails made by series and continued
# fractions (../numbers/exactly.py), never by quadrature as the engine makes its large ones.
import sys

from pathlib import Path

HERE = Path(__file__).resolve().parent
sys.path.append(str(HERE.parent / "numbers"))

import mpmath  # noqa: E402
from exactly import gamma_prefix, gamma_tails, mp, mpf, normal_tail  # noqa: E402

COUNTS = [0, 1, 2, 3, 7, 20, 100, 499, 500, 1000, 10**4, 10**6, 10**9]
LEVELS = [0.5, 0.8, 0.95, 0.999, 1 - 1e-12]


def newton(f, x):
    """Root of f, which gives (value, slope) in log x, near x."""
    for _ in range(200):
        value, slope = f(x)
        step = -value / slope
        x *= mp.exp(step)
        if abs(step) < mpf(10) ** -32:
            return x
    raise ValueError("no root")


def deviate(tail):
    z = mp.sqrt(2) * mp.erfinv(1 - 2 * mpf(float(tail))) if tail > 1e-10 else mp.sqrt(-2 * mp.log(tail))
    for _ in range(60):
        here = normal_tail(z)
        step = mp.log(here / tail) * here / (mp.exp(-z * z / 2) / mp.sqrt(2 * mp.pi))
        z += step
        if abs(step) < mpf(10) ** -35:
            return z
    raise ValueError("no deviate")


def guess(shape, z):
    root = 1 - 1 / (9 * shape) + z / (3 * mp.sqrt(shape))
    return shape * root**3 if root > 0.3 else shape * mp.exp(z / mp.sqrt(shape))


def gamma_end(shape, tail, z, low):
    def f(x):
        here = gamma_tails(shape, x)[0 if low else 1]
        slope = gamma_prefix(mpf(shape), x) / here
        return mp.log(here / tail), slope if low else -slope

    return newton(f, guess(mpf(shape), -z if low else z))


def mid_p_end(count, tail, z, low):
    if count == 0:
        return mpf(0) if low else max(mpf(0), -mp.log(2 * tail))

    def f(x):
        exactly = gamma_prefix(mpf(count), x) / count
        here = (gamma_tails(count + 1, x)[0] if low else gamma_tails(count, x)[1]) + exactly / 2
        slope = exactly * (x + count) / 2 / here
        return mp.log(here / tail), slope if low else -slope

    return newton(f, guess(count + mpf(0.5), -z if low else z))


def likelihood_end(count, z, low):
    if count == 0:
        return mpf(0) if low else z * z / 2
    aim = z * z / 2

    def f(x):
        return x - count - count * mp.log(x / count) - aim, x - count

    spread = z / mp.sqrt(mpf(count))
    start = count * (mp.exp(-spread - spread**2 / 6) if low else 1 + spread + spread**2 / 3)
    return newton(f, start)


def ends(method, count, tail):
    z, n = deviate(tail), mpf(count)
    if method == "exact":
        return gamma_end(count, tail, z, True) if count else mpf(0), gamma_end(count + 1, tail, z, False)
    if method == "mid_p":
        return mid_p_end(count, tail, z, True), mid_p_end(count, tail, z, False)
    if method == "score":
        half = z * mp.sqrt(n + z * z / 4)
        return n + z * z / 2 - half, n + z * z / 2 + half
    if method == "likelihood":
        return likelihood_end(count, z, True), likelihood_end(count, z, False)
    if method == "jeffreys":
        shape = n + mpf(0.5)
        return gamma_end(shape, tail, z, True) if count else mpf(0), gamma_end(shape, tail, z, False)
    if method == "byar":
        low = n * max(mpf(0), 1 - 1 / (9 * n) - z / (3 * mp.sqrt(n))) ** 3 if count else mpf(0)
        m = n + 1
        return low, m * (1 - 1 / (9 * m) + z / (3 * mp.sqrt(m))) ** 3
    if method == "wald":
        return max(mpf(0), n - z * mp.sqrt(n)), n + z * mp.sqrt(n)
    if method == "log_wald":
        return n * mp.exp(-z / mp.sqrt(n)), n * mp.exp(z / mp.sqrt(n))
    if method == "square_root":
        root = mp.sqrt(n + mpf(3) / 8)
        return (max(mpf(0), max(mpf(0), root - z / 2) ** 2 - mpf(3) / 8), (root + z / 2) ** 2 - mpf(3) / 8)
    if method == "event":
        return gamma_end(count, tail, z, True), gamma_end(count, tail, z, False)
    if method == "bayes":  # prior shape 2.5, rate 40, exposure 60
        return gamma_end(n + mpf(2.5), tail, z, True) / 100, gamma_end(n + mpf(2.5), tail, z, False) / 100
    raise ValueError(method)


METHODS = "exact mid_p score likelihood jeffreys byar wald log_wald square_root event bayes".split()


def main():
    with open(HERE / "limits.tsv", "w", encoding="utf-8") as out:
        out.write("# Limits for one rate, exposure 1 (bayes: exposure 60, prior shape 2.5 and rate 40).\n")
        out.write(f"# Made by limits.py: mpmath {mpmath.__version__} at {mp.dps} digits, written to 20.\n")
        out.write("case\tsource\tinputs\texpected\ttolerance\n")
        for method in METHODS:
            for count in COUNTS:
                if count == 0 and method in ("log_wald", "event"):
                    continue
                for level in LEVELS:
                    tail = (1 - mpf(level)) / 2
                    low, high = ends(method, count, tail)
                    out.write(
                        f"{method}\tlimits.py\tcount={count} confidence={level!r}\t"
                        f"low={mp.nstr(low, 20)} high={mp.nstr(high, 20)}\tr1e-12\n"
                    )


if __name__ == "__main__":
    main()
