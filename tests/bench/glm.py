"""What a Poisson fit of a million rows costs, against statsmodels and scikit-learn, in one run.

  python3 glm.py ENGINE_LIBRARY [columns ...] [--rows N] [--hands 2] [--no-peers] [--levels N]

ENGINE_LIBRARY is build/release/libengine.a. Columns are half numbers and half levels unless told; peers get the same columns
as one dense matrix already in memory, made outside the time. Peak memory is that of each child process, less what it
held before the fit.
"""
import argparse, json, os, resource, subprocess, sys, tempfile, time
import numpy as np

HERE = os.path.dirname(os.path.abspath(__file__))
ROOT = os.path.dirname(os.path.dirname(HERE))


def draw(rows, columns, levels_in=None):
    """Numbers and level columns with moderate effects; a count of about one a row."""
    rng = np.random.default_rng(20240611)
    numbers = columns - columns * 2 // 5 if columns < 20 else columns * 7 // 10
    sizes = [levels_in] if levels_in else [3, 5, 4, 6, 2, 8][: columns - numbers]
    x = [rng.normal(50, 10, rows) if j % 3 else rng.gamma(2, 2, rows) for j in range(numbers)]
    g = [rng.integers(0, k, rows).astype(np.int32) for k in sizes]
    eta = np.zeros(rows)
    for j, column in enumerate(x):
        eta += rng.normal(0, 0.15) * (column - column.mean()) / column.std()
    for k, column in zip(sizes, g):
        eta += rng.normal(0, 0.3, k)[column]
    exposure = rng.gamma(4, 0.25, rows)
    count = rng.poisson(exposure * np.exp(eta)).astype(float)
    return count, exposure, x, g, sizes


def write(path, count, exposure, x, g, sizes):
    with open(path, "wb") as f:
        np.array([len(count), len(x), len(g)], np.uint64).tofile(f)
        for column in [count, exposure, *x]:
            column.astype("<f8").tofile(f)
        for k, column in zip(sizes, g):
            np.array([k], np.uint64).tofile(f)
            column.astype("<i4").tofile(f)


def dense(x, g, sizes, reference):
    columns = [np.ones(len(x[0]) if x else len(g[0]))] + x
    for k, column, r in zip(sizes, g, reference):
        columns += [(column == level).astype(float) for level in range(k) if level != r]
    return np.column_stack(columns)


def child(function, *arguments):
    """Runs a peer in a process of its own; its seconds, extra peak memory in MB, and what it found."""
    read, write_end = os.pipe()
    pid = os.fork()
    if pid == 0:
        held = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        start = time.perf_counter()
        found = function(*arguments)
        seconds = time.perf_counter() - start
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
        os.write(write_end, json.dumps([seconds, (peak - held) / 1024, found]).encode())
        os._exit(0)
    os.close(write_end)
    with os.fdopen(read) as f:
        text = f.read()
    os.waitpid(pid, 0)
    return json.loads(text)


def fit_statsmodels(y, matrix, exposure):
    import statsmodels.api as sm
    result = sm.GLM(y, matrix, family=sm.families.Poisson(), exposure=exposure).fit()
    return [float(result.params[0]), float(result.bse[0]), float(result.deviance)]


def fit_sklearn(y, matrix, exposure):
    from sklearn.linear_model import PoissonRegressor
    model = PoissonRegressor(alpha=0, fit_intercept=True, max_iter=1000, tol=1e-6)
    model.fit(matrix, y / exposure, sample_weight=exposure)
    return [float(model.intercept_)]


def main():
    parser = argparse.ArgumentParser()
    parser.add_argument("library")
    parser.add_argument("columns", nargs="*", type=int, default=[5, 20])
    parser.add_argument("--rows", type=int, default=1_000_000)
    parser.add_argument("--hands", type=int, default=2)
    parser.add_argument("--levels", type=int)
    parser.add_argument("--no-peers", action="store_true")
    told = parser.parse_args()
    folder = tempfile.mkdtemp()
    binary = os.path.join(folder, "glm_bench")
    subprocess.run(["g++", "-std=c++20", "-O2", "-I", ROOT, "-I", "/usr/include/eigen3",
                    os.path.join(HERE, "glm_bench.cpp"), told.library, "-o", binary, "-lpthread"], check=True)
    for columns in told.columns:
        count, exposure, x, g, sizes = draw(told.rows, columns, told.levels)
        data = os.path.join(folder, "data.bin")
        write(data, count, exposure, x, g, sizes)
        ours = json.loads(subprocess.run([binary, data, str(told.hands), "5"], capture_output=True, text=True, check=True).stdout)
        print(f"{told.rows} rows, {columns} columns ({len(x)} numbers, levels {sizes}), {told.hands} hands")
        print("  ours:", json.dumps(ours))
        if told.no_peers:
            continue
        reference = [int(np.argmax([exposure[column == level].sum() for level in range(k)])) for k, column in zip(sizes, g)]
        matrix = dense(x, g, sizes, reference)
        extra = ours["peak_mb"] - ours["data_mb"]
        seconds, peak, found = child(fit_statsmodels, count, matrix, exposure)
        print(f"  statsmodels: {seconds:.2f} s, {peak:.0f} MB over its data; deviance {found[2]!r}, baseline {found[0]!r} se {found[1]!r}")
        print(f"    fit {seconds / ours['fit']:.0f} times faster, whole answer {seconds / ours['all']:.0f} times;"
              f" extra memory {extra:.0f} MB, {extra / peak:.3f} of its; whole process {ours['peak_mb'] / (peak + matrix.nbytes / 2**20):.3f} of its")
        scaled = (matrix[:, 1:] - matrix[:, 1:].mean(0)) / matrix[:, 1:].std(0)
        seconds, peak, found = child(fit_sklearn, count, scaled, exposure)
        print(f"  scikit-learn (columns standardised for it, outside the time): {seconds:.2f} s")
        print(f"    fit {seconds / ours['fit']:.1f} times faster, whole answer {seconds / ours['all']:.1f} times")


if __name__ == "__main__":
    main()
