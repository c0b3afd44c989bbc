"""Anderson acceleration of many fixed points at once, each operating point with its own history."""

import numpy as np

from solver.network import Complex, Index, Real

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
        self.image: Complex | None = None
        self.residual: Complex | None = None
        self.images: list[Complex] = []  # steps of g(x), newest last
        self.residuals: list[Complex] = []  # steps of the weighted residual

    def next(self, image: Complex, residual: Complex) -> Complex:
        """The next guess.

        image : (live, k, batch) complex [V], g(x)
        residual : (live, k, batch) complex [V], g(x) - x
        Returns : (live, k, batch) complex [V]
        """
        weighted = residual * self.weight
        if self.image is not None and self.residual is not None:
            self.images = [*self.images[1 - DEPTH :], image - self.image]
            self.residuals = [*self.residuals[1 - DEPTH :], weighted - self.residual]
        self.image, self.residual = image, weighted
        guess = image.copy()
        if self.images:
            for share, step in zip(self._mix(weighted), self.images, strict=True):
                guess -= share * step
        return guess

    def restart(self, points: Index) -> None:
        """Forgets the history of some operating points."""
        for step in (*self.residuals, *self.images):
            step[..., points] = 0

    def keep(self, points: Index) -> None:
        """Goes on with some operating points only."""
        if self.weight.shape[-1] > 1:
            self.weight = self.weight.take(points, axis=-1)
        self.residuals = [s.take(points, axis=-1) for s in self.residuals]
        self.images = [s.take(points, axis=-1) for s in self.images]
        if self.image is not None and self.residual is not None:
            self.image, self.residual = self.image.take(points, axis=-1), self.residual.take(points, axis=-1)

    def _mix(self, residual: Complex) -> Real:
        """(step, batch) least squares by normal equations, scaled, with a little damping."""
        width = residual.shape[-1]
        stacked = np.stack((*self.residuals, residual)).reshape(len(self.residuals) + 1, -1, width)
        steps = np.moveaxis(stacked, -1, 0).copy().view(np.float64)  # (batch, step, unknown) in real parts
        gram = steps @ np.swapaxes(steps, 1, 2)
        scale = np.sqrt(np.maximum(np.einsum("bii->bi", gram)[:, :-1], np.finfo(float).tiny))
        count = len(self.residuals)
        square = gram[:, :count, :count] / (scale[:, :, None] * scale[:, None, :])
        square[:, np.arange(count), np.arange(count)] = 1 + 1e-13
        mix = np.linalg.solve(square, (gram[:, :count, count] / scale)[..., None])[..., 0]
        return np.ascontiguousarray((mix / scale).T)
