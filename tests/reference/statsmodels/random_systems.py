# SPDX-License-Identifier: MIT
"""Filter and smoother of random linear systems by an independent library, for test_random_systems.cpp.

Run on Debian 12 with python3-statsmodels (the versions stand in the output):
    python3 random_systems.py > random_systems.txt

Two systems, x_k = F_k x_(k-1) + w_k, z_k = H_k x_k + v_k, x_0 from the prior, v of variance `noise`:
  slow    every state by itself: F diagonal (`kept`), w of diagonal variance (`added`), different at each time
  moving  the first states move, F dense in their rows and the identity below; w = B u, u of variance `q`
A line is a name, then its numbers: matrices row by row, covariances their lower triangle. Inputs are rounded
before they are used, so that what stands in the file is the whole of them.
"""

import numpy
import scipy
import statsmodels
from statsmodels.tsa.statespace.kalman_smoother import KalmanSmoother

SEED = 20240
random = numpy.random.RandomState(SEED)


def draw(*shape):
    return numpy.round(random.standard_normal(shape), 4)


def line(name, values):
    print(name, *(f"{v:.13g}" for v in numpy.ravel(values)))


def triangle(matrix):
    return matrix[numpy.tril_indices(len(matrix))]


def solved(measured, design, transition, state_covariance, noise, mean, covariance):
    """Arrays with the time last; transition and state_covariance[..., k] lead from k to k + 1."""
    count, states = design.shape[0], design.shape[1]
    model = KalmanSmoother(k_endog=count, k_states=states, k_posdef=states)
    model.bind(numpy.asfortranarray(measured))
    model["design"] = design
    model["transition"] = transition
    model["selection"] = numpy.eye(states)
    model["state_cov"] = state_covariance
    model["obs_cov"] = noise * numpy.eye(count)
    model.initialize_known(mean, covariance)
    return model.smooth()


def prior(states):
    root = draw(states, states)
    return draw(states), numpy.round(root @ root.T / states + 0.01 * numpy.eye(states), 4)


def slow(states=14, times=6, count=2, noise=0.3):
    mean, covariance = prior(states)
    kept = numpy.round(1.0 - 0.2 * abs(draw(times, states)), 4)
    added = numpy.round(0.05 * draw(times, states) ** 2, 4)
    design = draw(times, count, states)
    measured = 3.0 * draw(times, count)
    # Into time k leads the k-th of kept and added; the first and what would lead out of the last are not used.
    transition = numpy.stack([numpy.diag(kept[(k + 1) % times]) for k in range(times)], axis=-1)
    change = numpy.stack([numpy.diag(added[(k + 1) % times]) for k in range(times)], axis=-1)
    result = solved(measured.T, design.transpose(1, 2, 0), transition, change, noise, mean, covariance)
    line("slow.size", [states, times, count])
    line("slow.noise", [noise])
    line("slow.mean", mean)
    line("slow.covariance", triangle(covariance))
    for k in range(times):
        line(f"slow.kept.{k}", kept[k])
        line(f"slow.added.{k}", added[k])
        line(f"slow.design.{k}", design[k])
        line(f"slow.measured.{k}", measured[k])
        line(f"slow.filtered_mean.{k}", result.filtered_state[:, k])
        line(f"slow.filtered_covariance.{k}", triangle(result.filtered_state_cov[:, :, k]))
        line(f"slow.smoothed_mean.{k}", result.smoothed_state[:, k])
        line(f"slow.smoothed_covariance.{k}", triangle(result.smoothed_state_cov[:, :, k]))


def moving(states=8, moved=3, inputs=2, times=40, count=2, noise=0.5):
    mean, covariance = prior(states)
    transition = numpy.eye(states)
    transition[:moved] = numpy.round(0.3 * draw(moved, states) / states**0.5, 4)
    transition[:moved, :moved] += 0.7 * numpy.eye(moved)
    entry = numpy.zeros((states, inputs))
    entry[:moved] = draw(moved, inputs)
    q = numpy.round(0.05 + abs(draw(inputs)), 4)
    design = draw(times, count, states)
    measured = 3.0 * draw(times, count)
    change = entry @ numpy.diag(q) @ entry.T
    result = solved(measured.T, design.transpose(1, 2, 0), transition, change, noise, mean, covariance)
    line("moving.size", [states, moved, inputs, times, count])
    line("moving.noise", [noise])
    line("moving.mean", mean)
    line("moving.covariance", triangle(covariance))
    line("moving.transition", transition[:moved])
    line("moving.entry", entry[:moved])
    line("moving.q", q)
    for k in range(times):
        line(f"moving.design.{k}", design[k])
        line(f"moving.measured.{k}", measured[k])
    line("moving.filtered_mean", result.filtered_state[:, -1])
    line("moving.filtered_covariance", triangle(result.filtered_state_cov[:, :, -1]))
    line("moving.log_likelihood", [result.llf])


print(f"# random_systems.py, seed {SEED}: statsmodels {statsmodels.__version__}, "
      f"numpy {numpy.__version__}, scipy {scipy.__version__}")
slow()
moving()
