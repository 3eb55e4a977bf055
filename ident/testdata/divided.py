"""Divided differences of exp in 120-digit arithmetic, for divided_test.go.

    python3 divided.py > divided.csv

Each line is a set of nodes, ascending and separated by spaces, and the
divided difference. Equal nodes are parted by 1e-20; the recurrence then loses
80 digits of 120 at most. Nodes are taken as the doubles that they are.
"""

import random

from mpmath import exp, mp, mpf

mp.dps = 120


def divided(nodes):
    xs = [mpf(x) + k * mpf(10) ** -20 for k, x in enumerate(nodes)]
    column = [exp(x) for x in xs]
    for width in range(1, len(xs)):
        column = [(column[k + 1] - column[k]) / (xs[k + width] - xs[k]) for k in range(len(column) - 1)]
    return column[0]


def sets():
    rng = random.Random(11)
    yield [-1.0, -1.0]
    yield [-0.3] * 5
    yield [0.0, 0.0, 0.0, 0.0]
    for spread in [1e-12, 1e-6, 1e-3, 0.1, 0.9, 1.9, 1.999, 2.001, 2.1, 3, 8, 40, 300, 1e4]:
        for count in (2, 3, 4, 5):
            for middle in (0.0, -0.5, -20.0):
                inner = [rng.uniform(0, spread) for _ in range(count - 2)]
                yield sorted(middle - x for x in [0.0, spread] + inner)
                if count > 2:  # two clusters
                    near = [rng.choice([0.0, spread]) + rng.uniform(-1e-6, 1e-6) * spread for _ in range(count - 2)]
                    yield sorted(middle - x for x in [0.0, spread] + near)
                    yield sorted(middle - x for x in [0.0, spread] + [0.0] * (count - 2))


print("nodes,value")
for nodes in sets():
    value = divided(nodes)
    if value > mpf(10) ** -250:
        print(" ".join(repr(x) for x in nodes) + "," + mp.nstr(value, 20))
