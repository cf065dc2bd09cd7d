"""What must hold of the solver and the sampler whatever the limit state."""

import numpy as np
import pytest
from scipy.stats import norm

from screener.likelihood import form
from screener.likelihood.form import first_order
from screener.likelihood.sampling import sample_around


def planes(normals, distances):
    def limit_state(u, rows):
        return distances[rows] - np.einsum("ij,ij->i", normals[rows], u), -normals[rows]

    return limit_state


def bent(u, rows):
    """Bent around the origin: plain iteration without a step rule circles for ever on this one."""
    radius = np.sqrt(1 + np.square(u).sum(axis=1))
    g = 3.0 - u[:, 0] - 0.35 * (radius - 1) * (1 + 0.1 * np.sin(3 * u[:, 1]))
    by_radius = -0.35 * (1 + 0.1 * np.sin(3 * u[:, 1]))
    gradient = by_radius[:, None] * u / radius[:, None]
    gradient[:, 0] -= 1.0
    gradient[:, 1] -= 0.35 * (radius - 1) * 0.3 * np.cos(3 * u[:, 1])
    return g, gradient


@pytest.fixture
def many():
    generator = np.random.default_rng(0)
    normals = generator.normal(size=(5000, 4))
    normals /= np.linalg.norm(normals, axis=1, keepdims=True)
    return normals, generator.uniform(-3, 6, 5000)


def test_planes_in_closed_form(many):
    normals, distances = many
    found = first_order(planes(normals, distances), 5000, 4)
    assert found.converged.all()
    np.testing.assert_allclose(found.beta, distances, atol=1e-9)
    np.testing.assert_allclose(found.alpha, normals, atol=1e-9)
    np.testing.assert_allclose(found.point, distances[:, None] * normals, atol=1e-8)


def test_scaling_the_limit_state_changes_nothing(many):
    normals, distances = many
    for scale in (1e-9, 1e9):
        np.testing.assert_allclose(first_order(planes(scale * normals, scale * distances), 5000, 4).beta, distances, atol=1e-8)


def test_blocks_and_order_change_nothing(many, monkeypatch):
    normals, distances = many
    whole = first_order(planes(normals, distances), 5000, 4)
    order = np.random.default_rng(1).permutation(5000)
    monkeypatch.setattr(form, "BLOCK", 333)
    cut = first_order(planes(normals[order], distances[order]), 5000, 4)
    np.testing.assert_array_equal(cut.beta, whole.beta[order])


def test_joint_with_an_unknown_is_unknown_and_alone(many):
    normals, distances = many
    distances = np.where(np.arange(5000) == 7, np.nan, distances)
    found = first_order(planes(normals, distances), 5000, 4)
    assert found.unknown.sum() == 1 and np.isnan(found.beta[7]) and np.isnan(found.point[7]).all()
    assert np.delete(found.converged, 7).all() and not found.converged[7]


def test_flat_limit_state_says_that_it_did_not_arrive():
    found = first_order(lambda u, rows: (np.ones(len(u)), np.zeros(u.shape)), 3, 2)
    assert not found.converged.any() and not found.unknown.any()


def test_no_joints_at_all():
    assert first_order(bent, 0, 3).beta.shape == (0,)


def test_bent_limit_state_converges_to_the_nearest_point():
    found = first_order(bent, 1, 2)
    assert found.converged[0]
    angle = np.linspace(-np.pi, np.pi, 2001)
    radii = np.linspace(0.01, 6, 3000)
    grid = np.stack([np.outer(radii, np.cos(angle)), np.outer(radii, np.sin(angle))], axis=-1)
    fails = bent(grid.reshape(-1, 2), None)[0].reshape(grid.shape[:2]) < 0
    assert found.beta[0] == pytest.approx(radii[fails.any(axis=1)].min(), abs=3e-3)


def test_sampling_does_not_depend_on_blocks_or_order(many, monkeypatch):
    normals, distances = (a[:200] for a in many)
    centres = (distances[:, None] * normals)[:, None, :]
    rows = np.arange(200)
    whole = sample_around(planes(normals, distances), centres, rows, 9, 400)
    monkeypatch.setattr("screener.likelihood.sampling.POINTS_AT_ONCE", 1500)
    backwards = sample_around(planes(normals, distances), centres[::-1], rows[::-1], 9, 400)
    np.testing.assert_allclose(backwards.probability[::-1], whole.probability, rtol=1e-12)


def test_sampling_error_is_what_it_says(many):
    normals = many[0][:300]
    distances = np.linspace(0.5, 4.5, 300)
    rows = np.arange(300)
    exact = norm.cdf(-distances)
    errors = []
    for seed in range(20):
        found = sample_around(planes(normals, distances), np.maximum(distances, 0)[:, None, None] * normals[:, None], rows, seed, 500)
        errors.append((found.probability - exact) / found.standard_error)
    assert np.std(errors) == pytest.approx(1.0, abs=0.12)
    assert abs(np.mean(errors)) < 0.15


def test_sampling_around_two_centres_sees_both_failures():
    def two_sides(u, rows):
        return 3.0 - np.abs(u[:, 0]), None

    found = sample_around(two_sides, np.array([[[3.0, 0.0], [-3.0, 0.0]]]), np.array([0]), 1, 20_000)
    assert found.probability[0] == pytest.approx(2 * norm.cdf(-3), abs=4 * found.standard_error[0])
