# SPDX-License-Identifier: Apache-2.0
"""Least squares with the covariance matrices and the influence measures that the regressions on log time report. Plain NumPy."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from ..errors import WrongUse

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True)
class LeastSquares:
    """A fitted linear model of n rows and k columns (the caller puts the constant in).

    coefficients (k,), residuals (n,), hat (n,) leverages, inverse (k, k) of X'X, variance the residual variance with n - k,
    r_squared about the mean of y.
    """

    x: Floats
    coefficients: Floats
    residuals: Floats
    hat: Floats
    inverse: Floats
    variance: float
    r_squared: float

    def plain(self) -> Floats:
        """(k,) standard errors under equal variances."""
        return np.asarray(np.sqrt(np.diag(self.inverse) * self.variance))

    def hc3(self) -> Floats:
        """(k,) heteroscedasticity-consistent standard errors, HC3 (MacKinnon & White 1985). NaN where a leverage is one."""
        left = 1.0 - self.hat
        with np.errstate(divide="ignore", invalid="ignore"):
            weight = np.where(left > 1e-12, (self.residuals / left) ** 2, np.nan)
        x, inverse, back = self._centred()
        return _sandwich(back @ inverse, (x * weight[:, None]).T @ x)

    def hac(self, lags: int, *, small_sample: bool = False) -> Floats:
        """(k,) autocorrelation-consistent standard errors with Bartlett weights (Newey & West 1987), rows in time order."""
        x, inverse, back = self._centred()
        score = x * self.residuals[:, None]
        middle = score.T @ score
        for lag in range(1, min(lags, len(score) - 1) + 1):
            cross = score[lag:].T @ score[:-lag]
            middle += (1.0 - lag / (lags + 1.0)) * (cross + cross.T)
        n, k = self.x.shape
        return _sandwich(back @ inverse, middle * (n / (n - k) if small_sample else 1.0))

    def _centred(self) -> tuple[Floats, Floats, Floats]:
        """Columns, inverse, and what leads back to the coefficients: a line is taken about its mean, so that a predictor which hardly
        varies (the log of time since a start 1e10 years ago) loses no digits."""
        n, k = self.x.shape
        if k != 2 or not (self.x[:, 0] == 1).all():
            return self.x, self.inverse, np.eye(k)
        mean = float(self.x[:, 1].mean())
        away = self.x[:, 1] - mean
        back = np.array([[1.0, -mean], [0.0, 1.0]])
        return np.column_stack([np.ones(n), away]), np.diag([1.0 / n, 1.0 / float(away @ away)]), back

    def cooks_distance(self) -> Floats:
        """(n,) influence of each row on all coefficients (Cook 1977)."""
        k = self.x.shape[1]
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(self.residuals**2 * self.hat / (k * self.variance * (1.0 - self.hat) ** 2))

    def without(self) -> Floats:
        """(n, k) coefficients after leaving each row out."""
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(self.coefficients - (self.inverse @ self.x.T).T * (self.residuals / (1.0 - self.hat))[:, None])


def least_squares(x: Floats, y: Floats) -> LeastSquares:
    """Fit y (n,) on the columns of x (n, k) by QR of the scaled columns, with one refinement in extended precision.

    Raises WrongUse where there are not more rows than columns, or the columns depend on one another.
    """
    n, k = x.shape
    if n <= k:
        raise WrongUse(f"{n} rows cannot carry {k} coefficients; at least {k + 1} are needed")
    scale = np.sqrt((x * x).sum(axis=0))
    if not (scale > 0).all():
        raise WrongUse("a column of the regression is zero throughout")
    q, r = np.linalg.qr(x / scale)
    if np.abs(np.diag(r)).min() < 1e-13:
        raise WrongUse("the columns of the regression depend on one another")
    beta = np.linalg.solve(r, q.T @ y) / scale
    exact = x.astype(np.longdouble)
    for _ in range(2):
        left = np.asarray(y - exact @ beta, dtype=float)
        beta = beta + np.linalg.solve(r, q.T @ left) / scale
    residuals = np.asarray(y - exact @ beta, dtype=float)
    root = np.linalg.inv(r) / scale[:, None]
    total = float(((y - y.mean()) ** 2).sum())
    return LeastSquares(
        x=x,
        coefficients=beta,
        residuals=residuals,
        hat=(q * q).sum(axis=1),
        inverse=root @ root.T,
        variance=float(residuals @ residuals) / (n - k),
        r_squared=1.0 - float(residuals @ residuals) / total if total > 0 else float("nan"),
    )


def line(x: Floats, y: Floats) -> LeastSquares:
    """Fit y on a constant and one predictor; coefficients are (intercept, slope). Centred, so that no digits are lost."""
    n = len(x)
    mean_x, mean_y = float(x.mean()), float(y.mean())
    dx, dy = x - mean_x, y - mean_y
    sxx = float(dx @ dx)
    if n < 3 or not sxx > 0:
        raise WrongUse("a line needs three points at two places at least")
    slope = float(dx @ dy) / sxx
    residuals = dy - slope * dx
    inverse = np.array([[1.0 / n + mean_x**2 / sxx, -mean_x / sxx], [-mean_x / sxx, 1.0 / sxx]])
    syy = float(dy @ dy)
    return LeastSquares(
        x=np.column_stack([np.ones(n), x]),
        coefficients=np.array([mean_y - slope * mean_x, slope]),
        residuals=residuals,
        hat=1.0 / n + dx * dx / sxx,
        inverse=inverse,
        variance=float(residuals @ residuals) / (n - 2),
        r_squared=float(dx @ dy) ** 2 / (sxx * syy) if syy > 0 else float("nan"),
    )


def _sandwich(bread: Floats, filling: Floats) -> Floats:
    return np.asarray(np.sqrt(np.diag(bread @ filling @ bread.T)))
