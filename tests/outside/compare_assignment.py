#!/usr/bin/env python3
"""Least total costs of random, degenerate, rectangular and partly forbidden assignment problems,
against scipy.optimize.linear_sum_assignment. Usage: compare_assignment.py PROGRAM
Exit status 77 (skipped) without SciPy."""
import subprocess
import sys

try:
    import numpy
    from scipy.optimize import linear_sum_assignment
except ImportError:
    print("skipped: python3-scipy is not installed")
    sys.exit(77)


def problems(random):
    for number in range(600):
        rows, columns = random.integers(1, 40, 2)
        kind = number % 4
        if kind == 0:
            costs = random.normal(0, 10, (rows, columns))
        elif kind == 1:
            costs = random.integers(0, 3, (rows, columns)).astype(float)
        elif kind == 2:
            costs = numpy.add.outer(random.integers(0, 5, rows), random.integers(0, 5, columns))
            costs = costs.astype(float)
        else:
            # Square ones with many forbidden pairs, so that some have no full assignment.
            columns = rows if number % 8 == 3 else columns
            costs = random.exponential(5, (rows, columns))
            costs[random.random((rows, columns)) < random.uniform(0, 0.95)] = numpy.inf
        yield costs
    yield random.random((400, 300))


def least_total(costs):
    try:
        return float(costs[linear_sum_assignment(costs)].sum())
    except ValueError:
        return None


def as_text(costs):
    body = " ".join("x" if numpy.isinf(value) else repr(float(value)) for value in costs.flat)
    return f"{costs.shape[0]} {costs.shape[1]} {body}\n"


def main():
    made = list(problems(numpy.random.default_rng(20)))
    text = "".join(as_text(costs) for costs in made)
    answers = subprocess.run([sys.argv[1]], input=text, capture_output=True, text=True, check=True)
    ours = answers.stdout.split()
    if len(ours) != len(made):
        sys.exit(f"{len(ours)} answers to {len(made)} problems")
    wrong = without = 0
    for costs, answer in zip(made, ours):
        theirs = least_total(costs)
        if theirs is None:
            without += 1
            wrong += answer != "none"
        else:
            wrong += answer == "none" or abs(float(answer) - theirs) > 1e-9 * (1 + abs(theirs))
    print(f"{len(made)} problems, {without} without a full assignment, {wrong} different")
    sys.exit(1 if wrong or without == 0 else 0)


main()
