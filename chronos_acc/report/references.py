# SPDX-License-Identifier: Apache-2.0
"""The published methods, with what in a result shows that one was used; a report cites only those."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass


@dataclass(frozen=True)
class Reference:
    """A published method. ``marks`` are names of tests, laws, nulls, checks or settings any of which means that it was used."""

    key: str
    text: str
    marks: frozenset[str]


def _ref(key: str, text: str, *marks: str) -> Reference:
    return Reference(key, text, frozenset(marks))


REFERENCES: tuple[Reference, ...] = (
    _ref("Anderson and Darling 1954", "Anderson, T. W. and Darling, D. A. (1954). A test of goodness of fit. Journal of the American Statistical Association 49, 765–769.", "anderson_darling"),
    _ref("Birge 1932", "Birge, R. T. (1932). The calculation of errors by the method of least squares. Physical Review 40, 207–227.", "birge"),
    _ref("Brown et al. 2002", "Brown, E. N., Barbieri, R., Ventura, V., Kass, R. E. and Frank, L. M. (2002). The time-rescaling theorem and its application to neural spike train data analysis. Neural Computation 14, 325–346.", "fit_p_clustering"),
    _ref("Burnham and Anderson 2002", "Burnham, K. P. and Anderson, D. R. (2002). Model Selection and Multimodel Inference, 2nd ed. Springer.", "weight"),
    _ref("Chao 1987", "Chao, A. (1987). Estimating the population size for capture-recapture data with unequal catchability. Biometrics 43, 783–791.", "completeness"),
    _ref("Chapman 1951", "Chapman, D. G. (1951). Some properties of the hypergeometric distribution with applications to zoological sample censuses. University of California Publications in Statistics 1, 131–160.", "completeness"),
    _ref("Cox and Lewis 1966", "Cox, D. R. and Lewis, P. A. W. (1966). The Statistical Analysis of Series of Events. Methuen.", "laplace", "log_linear"),
    _ref("Crow 1974", "Crow, L. H. (1974). Reliability analysis for complex, repairable systems. In Reliability and Biometry, SIAM, 379–410.", "power_law"),
    _ref("Fellegi and Sunter 1969", "Fellegi, I. P. and Sunter, A. B. (1969). A theory for record linkage. Journal of the American Statistical Association 64, 1183–1210.", "link"),
    _ref("Good 1953", "Good, I. J. (1953). The population frequencies of species and the estimation of population parameters. Biometrika 40, 237–264.", "equal_effort"),
    _ref("Hartung and Knapp 2001", "Hartung, J. and Knapp, G. (2001). On tests of the overall treatment effect in meta-analysis with normally distributed responses. Statistics in Medicine 20, 1771–1782.", "lists"),
    _ref("Holm 1979", "Holm, S. (1979). A simple sequentially rejective multiple test procedure. Scandinavian Journal of Statistics 6, 65–70.", "p_holm"),
    _ref("Hurvich and Tsai 1989", "Hurvich, C. M. and Tsai, C.-L. (1989). Regression and time series model selection in small samples. Biometrika 76, 297–307.", "aicc"),
    _ref("Kvaløy and Lindqvist 1998", "Kvaløy, J. T. and Lindqvist, B. H. (1998). TTT-based tests for trend in repairable systems data. Reliability Engineering and System Safety 60, 13–28.", "anderson_darling"),
    _ref("Lewis and Robinson 1974", "Lewis, P. A. W. and Robinson, D. W. (1974). Testing for a monotone trend in a modulated renewal process. In Reliability and Biometry, SIAM, 163–182.", "lewis_robinson"),
    _ref("MacKinnon and White 1985", "MacKinnon, J. G. and White, H. (1985). Some heteroskedasticity-consistent covariance matrix estimators with improved finite sample properties. Journal of Econometrics 29, 305–325.", "ols_hc3"),
    _ref("Mann 1945", "Mann, H. B. (1945). Nonparametric tests against trend. Econometrica 13, 245–259.", "reverse_arrangements"),
    _ref("MIL-HDBK-189", "US Department of Defense (1981). MIL-HDBK-189, Reliability Growth Management.", "mil_hdbk_189"),
    _ref("Myers 1940", "Myers, R. J. (1940). Errors and bias in the reporting of ages in census data. Transactions of the Actuarial Society of America 41, 395–415.", "dating"),
    _ref("Raup 1979", "Raup, D. M. (1979). Biases in the fossil record of species and genera. Bulletin of the Carnegie Museum of Natural History 13, 85–91.", "recall_decay"),
    _ref("Sadler 1981", "Sadler, P. M. (1981). Sediment accumulation rates and the completeness of stratigraphic sections. Journal of Geology 89, 569–584.", "slope"),
    _ref("Sen 1968", "Sen, P. K. (1968). Estimates of the regression coefficient based on Kendall's tau. Journal of the American Statistical Association 63, 1379–1389.", "theil_sen"),
    _ref("Westfall and Young 1993", "Westfall, P. H. and Young, S. S. (1993). Resampling-Based Multiple Testing. Wiley.", "p_adjusted"),
)  # fmt: skip


def used(marks: Iterable[str]) -> tuple[Reference, ...]:
    """The references that the marks of a result call for, in order of key."""
    found = set(marks)
    return tuple(r for r in REFERENCES if r.marks & found)
