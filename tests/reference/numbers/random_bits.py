"""Writes random_bits.tsv: xoshiro256++ and SplitMix64 in plain Python whole numbers, independent of the engine."""
M = (1 << 64) - 1


def mix(z):
    z = ((z ^ (z >> 30)) * 0xBF58476D1CE4E5B9) & M
    z = ((z ^ (z >> 27)) * 0x94D049BB133111EB) & M
    return z ^ (z >> 31)


def rotl(x, k):
    return ((x << k) | (x >> (64 - k))) & M


def outputs(seed, stream, n):
    z, s = (seed + mix(stream)) & M, []
    for _ in range(4):
        z = (z + 0x9E3779B97F4A7C15) & M
        s.append(mix(z))
    return run(s, n)


def run(s, n):
    out = []
    for _ in range(n):
        out.append((rotl((s[0] + s[3]) & M, 23) + s[0]) & M)
        t = (s[1] << 17) & M
        s[2] ^= s[0]
        s[3] ^= s[1]
        s[1] ^= s[2]
        s[0] ^= s[3]
        s[2] ^= t
        s[3] = rotl(s[3], 45)
    return out


# The published check of SplitMix64 from seed 1234567 and of xoshiro256++ from state 1, 2, 3, 4.
z = 1234567
z = (z + 0x9E3779B97F4A7C15) & M
assert mix(z) == 6457827717110365317
assert run([1, 2, 3, 4], 4) == [41943041, 58720359, 3588806011781223, 3591011842654386]

with open("random_bits.tsv", "w") as f:
    f.write("# xoshiro256++ seeded by SplitMix64; made by random_bits.py (Python whole numbers). Whole and exact.\n")
    f.write("seed\tstream\tindex\tbits\n")
    for seed, stream in [(0, 0), (1, 0), (1234567, 0), (20240229, 0), (20240229, 1), (20240229, 999), (M, M)]:
        for i, bits in enumerate(outputs(seed, stream, 5)):
            f.write(f"{seed}\t{stream}\t{i}\t{bits}\n")
