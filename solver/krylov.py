"""Linear equations of many operating points at once, of which only the product is known."""

from collections.abc import Callable

import numpy as np

from solver.arrays import Real

CUT = 1e-13  # of the largest singular value, below which a direction is not determined


def solve_by_products(product: Callable[[Real], Real], right: Real, most: int, enough: float) -> Real:
    """Smallest residual of A x = b over the directions b, A b, A² b, …, each operating point on its own.

    min |b - A Q y| with Q orthonormal

    product : takes (batch, unknown) float and gives A times it, point by point
    right : (batch, unknown) float, b
    most : largest number of directions
    enough : residual over |b| at which all are done
    Returns : (batch, unknown) float
    Source : Saad, Schultz, GMRES: a generalized minimal residual algorithm for solving nonsymmetric linear
        systems, SIAM J. Sci. Stat. Comput. 7 (1986) 856-869
    """
    batch, unknowns = right.shape
    size = np.linalg.norm(right, axis=1)
    basis, square = np.zeros((batch, most + 1, unknowns)), np.zeros((batch, most + 1, most))
    basis[:, 0] = _unit(right, size)
    mix = np.zeros((batch, 1))
    for j in range(most):
        image, known = product(basis[:, j]), basis[:, : j + 1]
        before = np.linalg.norm(image, axis=1)
        for _ in range(2):  # once more for what rounding left over
            share = known @ image[..., None]
            image = image - (np.swapaxes(share, 1, 2) @ known)[:, 0]
            square[:, : j + 1, j] += share[..., 0]
        left = np.linalg.norm(image, axis=1)
        left[left <= CUT * before] = 0
        square[:, j + 1, j], basis[:, j + 1] = left, _unit(image, left)
        if j % 3 == 2 or j == most - 1 or not left.any():
            mix, rest = _least(square[:, : j + 2, : j + 1], size)
            if (rest <= enough * size).all():
                break
    return (mix[:, None] @ basis[:, : mix.shape[1]])[:, 0]


def _unit(values: Real, size: Real) -> Real:
    return values * np.divide(1.0, size, out=np.zeros_like(size), where=size > 0)[:, None]


def _least(square: Real, size: Real) -> tuple[Real, Real]:
    """(batch, direction) least squares of H y = |b| e1, and (batch,) what is left over."""
    mix = np.linalg.pinv(square, CUT)[:, :, 0] * size[:, None]
    gap = -(square @ mix[..., None])[..., 0]
    gap[:, 0] += size
    return mix, np.linalg.norm(gap, axis=1)
