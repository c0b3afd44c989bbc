"""Anderson acceleration of many fixed points at once, each operating point with its own history."""

import numpy as np

from solver.network import Complex, Real

DEPTH = 5


class Anderson:
    """Speeds up x = g(x) where plain repetition is slow, as it is close to the largest load.

    The next guess is g(x) less the mix of past steps that best cancels the residual. The map is not
    analytic in complex voltage, so real and imaginary parts count as separate unknowns.

    weight : (live, 1, batch) float [1/V], makes all voltage levels count alike
    Source : Walker, Ni, Anderson acceleration for fixed-point iterations, SIAM J. Numer. Anal. 49 (2011)
        1715-1735
    """

    def __init__(self, weight: Real) -> None:
        self.weight = weight
        self.before: tuple[Complex, Complex] | None = None
        self.residual_steps: list[Complex] = []
        self.image_steps: list[Complex] = []

    def next(self, image: Complex, residual: Complex) -> Complex:
        """The next guess.

        image : (live, k, batch) complex [V], g(x)
        residual : (live, k, batch) complex [V], g(x) - x
        Returns : (live, k, batch) complex [V]
        """
        if self.before is not None:
            self.image_steps.append(image - self.before[0])
            self.residual_steps.append((residual - self.before[1]) * self.weight)
            del self.image_steps[:-DEPTH], self.residual_steps[:-DEPTH]
        self.before = (image, residual)
        if not self.residual_steps:
            return image
        mix = self._mix(residual * self.weight)
        return image - sum(m * s for m, s in zip(mix, self.image_steps, strict=True))

    def restart(self, points: np.ndarray) -> None:
        """Forgets the history of the marked operating points."""
        for step in (*self.residual_steps, *self.image_steps):
            step[..., points] = 0

    def keep(self, points: np.ndarray) -> None:
        """Goes on with the marked operating points only."""
        self.weight = self.weight if self.weight.shape[-1] == 1 else self.weight[..., points]
        self.residual_steps = [s.take(points, axis=-1) for s in self.residual_steps]
        self.image_steps = [s.take(points, axis=-1) for s in self.image_steps]
        if self.before is not None:
            self.before = (self.before[0].take(points, axis=-1), self.before[1].take(points, axis=-1))

    def _mix(self, residual: Complex) -> Real:
        """(step, batch) least squares by normal equations, in floating point with a little damping."""
        steps = self.residual_steps
        gram = np.array([[_inner(a, b) for b in steps] for a in steps])  # (step, step, batch)
        right = np.array([_inner(a, residual) for a in steps])  # (step, batch)
        scale = np.sqrt(np.maximum(np.einsum("iib->ib", gram), 1e-300))
        gram = gram / (scale[:, None] * scale[None, :])
        gram[np.arange(len(steps)), np.arange(len(steps))] = 1 + 1e-13
        mix = np.linalg.solve(np.moveaxis(gram, -1, 0), (right / scale).T[..., None])[..., 0].T
        return mix / scale


def _inner(a: Complex, b: Complex) -> Real:
    return np.einsum("nkb,nkb->b", a.real, b.real) + np.einsum("nkb,nkb->b", a.imag, b.imag)
