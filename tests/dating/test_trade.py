# SPDX-License-Identifier: Apache-2.0
"""The notations of the trade: what compilers write, with the bounds each must have. The compile year is 2024 unless a row says otherwise.

Sources are named in the comment above a group; a group without one is common practice of the trade, read by the rules in chronos_acc/dating/settings.py.
"""

from __future__ import annotations

from typing import Any

import pytest

from chronos_acc.dating import Settings, read
from chronos_acc.dating.calendar import day_bounds, month_bounds
from chronos_acc.errors import DateRefused

Z = 1.959963984540054


def day(year: int, month: int, number: int) -> tuple[float, float]:
    return day_bounds(year, month, number)


def ago(early: float, late: float) -> tuple[float, float]:
    return 2024 - early, 2024 - late


CALENDAR = [
    # ISO 8601-1 for years, signed and astronomical
    ("1985", (1985, 1986)), ("85", (85, 86)), ("0", (0, 1)), ("0000", (0, 1)), ("-500", (-500, -499)), ("−500", (-500, -499)), ("–500", (-500, -499)), ("+1985", (1985, 1986)),
    ("-13800000000", (-13800000000, -13799999999)), ("1500", (1500, 1501)), ("1000", (1000, 1001)), ("  1985  ", (1985, 1986)), ("1985\u00a0", (1985, 1986)),
    # decimals as written, half a unit of the last digit
    ("1985.5", (1985.45, 1985.55)), ("1969.546", (1969.5455, 1969.5465)), ("-499.5", (-499.55, -499.45)), ("1985.0", (1984.95, 1985.05)),
    # grouped thousands, powers of ten
    ("1,500", (1500, 1501)), ("1 500", (1500, 1501)), ("1\u2009500", (1500, 1501)), ("1'500", (1500, 1501)), ("1\u202f500", (1500, 1501)), ("-12,000", (-12000, -11999)),
    ("-1.38e10", (-1.385e10, -1.375e10)), ("−1.38×10¹⁰", (-1.385e10, -1.375e10)), ("-1.38 x 10^10", (-1.385e10, -1.375e10)), ("-4.5e9", (-4.55e9, -4.45e9)),
    ("1985.", (1985, 1986)), ("1985,", (1985, 1986)), ("in 1985", (1985, 1986)), ("the year 1985", (1985, 1986)),
]
ERAS = [
    # ISO 8601: 1 BCE is year 0
    ("44 BCE", (-43, -42)), ("44 BC", (-43, -42)), ("44 B.C.", (-43, -42)), ("44 B.C.E.", (-43, -42)), ("44BC", (-43, -42)), ("44 b.c.", (-43, -42)), ("BC 44", (-43, -42)), ("44 B. C.", (-43, -42)),
    ("753 BCE", (-752, -751)), ("1 BCE", (0, 1)), ("1 CE", (1, 2)), ("79 CE", (79, 80)), ("79 AD", (79, 80)), ("AD 79", (79, 80)), ("A.D. 79", (79, 80)), ("79 A.D.", (79, 80)), ("CE 79", (79, 80)),
    ("AD79", (79, 80)), ("1054 C.E.", (1054, 1055)), ("500 CE", (500, 501)), ("1000 AD", (1000, 1001)),
    # trailing zeros of BCE years are rounding, two digits count
    ("500 BCE", (-503.5, -493.5)), ("10,000 BCE", (-10498.5, -9498.5)), ("10 000 BC", (-10498.5, -9498.5)), ("3000 BCE", (-3048.5, -2948.5)), ("50 BCE", (-49, -48)), ("1200 BCE", (-1248.5, -1148.5)),
    # calibrated radiocarbon dates are calendar years
    ("3001 cal BC", (-3000, -2999)), ("cal AD 1200", (1200, 1201)), ("1200 cal AD", (1200, 1201)), ("10k BCE", (-10498.5, -9498.5)),
    ("2.5 million BCE", (-2549998.5, -2449998.5)),
]
AGES = [
    # Holden et al. 2011, Pure Appl. Chem. 83:1159-1162: a, ka, Ma, Ga
    ("66.0 Ma", ago(66.05e6, 65.95e6)), ("66 Ma", ago(66.5e6, 65.5e6)), ("66Ma", ago(66.5e6, 65.5e6)), ("100 Ma", ago(105e6, 95e6)), ("252 Ma", ago(252.5e6, 251.5e6)), ("4.567 Ga", ago(4.5675e9, 4.5665e9)),
    ("12 ka", ago(12500, 11500)), ("11.7 ka", ago(11750, 11650)), ("3.5 Gyr", ago(3.55e9, 3.45e9)), ("250 kyr", ago(255e3, 245e3)), ("5 Myr", ago(5.5e6, 4.5e6)), (".774 Ma", ago(774500, 773500)),
    ("300 kya", ago(305e3, 295e3)), ("65 mya", ago(65.5e6, 64.5e6)), ("3.8 bya", ago(3.85e9, 3.75e9)), ("65 MYA", ago(65.5e6, 64.5e6)), ("65 m.y.a.", ago(65.5e6, 64.5e6)), ("3.8 Gya", ago(3.85e9, 3.75e9)),
    ("500 years ago", ago(505, 495)), ("12,000 years ago", ago(12500, 11500)), ("12 thousand years ago", ago(12500, 11500)), ("2.1 million years ago", ago(2.15e6, 2.05e6)),
    ("13.8 billion years ago", ago(13.85e9, 13.75e9)), ("3 million years", ago(3.5e6, 2.5e6)), ("200,000 yrs ago", ago(205e3, 195e3)), ("150 a", ago(155, 145)), ("150 yr ago", ago(155, 145)),
    ("2.1×10⁹ years ago", ago(2.15e9, 2.05e9)), ("2.1 x 10^9 years ago", ago(2.15e9, 2.05e9)), ("2.1e9 a", ago(2.15e9, 2.05e9)), ("10⁹ years ago", ago(1.5e9, 0.5e9)), ("66 Ma ago", ago(66.5e6, 65.5e6)),
    ("3,000 ya", ago(3050, 2950)), ("12.5k years ago", ago(12550, 12450)), ("2.6 Myr ago", ago(2.65e6, 2.55e6)), ("3 mln years ago", ago(3.5e6, 2.5e6)),
    # Stuiver & Polach 1977, Radiocarbon 19:355-363: BP counts from 1950
    ("11650 BP", (-9705, -9695)), ("11653 cal BP", (-9703.5, -9702.5)), ("12 000 BP", (-10550, -9550)), ("12,000 cal. yr BP", (-10550, -9550)), ("12 ka BP", (-10550, -9550)), ("12 cal ka BP", (-10550, -9550)),
    ("12 kyr BP", (-10550, -9550)), ("11653 years before present", (-9703.5, -9702.5)), ("11653 calBP", (-9703.5, -9702.5)), ("11653 BP cal", (-9703.5, -9702.5)), ("11653 yr B.P.", (-9703.5, -9702.5)),
    ("2.58 Ma BP", (-2583050, -2573050)), ("11653 ybp", (-9703.5, -9702.5)), ("0 BP", (1949.5, 1950.5)), ("11653 cal. years BP", (-9703.5, -9702.5)),
    # Rasmussen et al. 2006; Walker et al. 2009: b2k counts from 2000
    ("11,703 b2k", (-9703.5, -9702.5)), ("11.7 ka b2k", (-9750, -9650)), ("11703 a b2k", (-9703.5, -9702.5)), ("11703 yr b2k", (-9703.5, -9702.5)),
]
ERRORS = [  # normal; bounds at 1.96 sd
    ("66.0 ± 0.05 Ma", 66e6, 0.05e6, 0.05e6), ("66.0 Ma ± 0.05 Ma", 66e6, 0.05e6, 0.05e6), ("66.0 Ma ± 0.05", 66e6, 0.05e6, 0.05e6), ("66.0±0.05 Ma", 66e6, 0.05e6, 0.05e6), ("66.0 +/- 0.05 Ma", 66e6, 0.05e6, 0.05e6),
    ("66.0 +- 0.05 Ma", 66e6, 0.05e6, 0.05e6), ("4567.3 Ma ± 160 ka", 4567.3e6, 160e3, 160e3), ("66.0 ± 0.1 Ma (2σ)", 66e6, 0.05e6, 0.05e6), ("66.0 ± 0.1 (2σ) Ma", 66e6, 0.05e6, 0.05e6),
    ("66.0 ± 0.1 Ma, 2 sigma", 66e6, 0.05e6, 0.05e6), ("66.0 ± 0.1 Ma (2 s.d.)", 66e6, 0.05e6, 0.05e6), ("66.0 ± 0.1 Ma (2-sigma)", 66e6, 0.05e6, 0.05e6), ("66.0 ± 0.05 Ma (1σ)", 66e6, 0.05e6, 0.05e6),
    ("66.0 ± 0.05 Ma (68%)", 66e6, 0.05e6, 0.05e6), ("66.0 ± 0.1 Ma (95% confidence)", 66e6, 0.1e6 / Z, 0.1e6 / Z),
    # JCGM 100:2008, 7.2.2: the error of the last digits in parentheses
    ("66.04(5) Ma", 66.04e6, 0.05e6, 0.05e6), ("251.902(24) Ma", 251.902e6, 0.024e6, 0.024e6), ("4.5673(2) Ga", 4.5673e9, 0.2e6, 0.2e6),
    ("66.0 Ma (± 0.05)", 66e6, 0.05e6, 0.05e6), ("66.0 (±0.05) Ma", 66e6, 0.05e6, 0.05e6), ("66.0 ± 0.1 Ma (2s)", 66e6, 0.05e6, 0.05e6),
    ("66.0 +0.3/−0.1 Ma", 66e6, 0.3e6, 0.1e6), ("66.0 +0.3 −0.1 Ma", 66e6, 0.3e6, 0.1e6), ("66.0 (+0.3/-0.1) Ma", 66e6, 0.3e6, 0.1e6), ("66.0 Ma +0.3/-0.1", 66e6, 0.3e6, 0.1e6), ("66.0 -0.1/+0.3 Ma", 66e6, 0.3e6, 0.1e6),
    ("12 ka ± 5 %", 12e3, 600, 600), ("12.0 ka ± 0.2 ka", 12e3, 200, 200), ("2.1×10⁹ ± 0.1×10⁹ years ago", None, 0, 0), ("500 ± 20 years ago", 500, 20, 20),
]
DATED_ERRORS = [
    ("1850 ± 10", 1850.5, 10, 10), ("1850 ± 10 years", 1850.5, 10, 10), ("1850 ± 10 CE", 1850.5, 10, 10), ("AD 1054 ± 2", 1054.5, 2, 2), ("1628 ± 5 BCE", -1626.5, 5, 5), ("1628 BCE ± 5", -1626.5, 5, 5),
    ("1850 +10/-5", 1850.5, 5, 10), ("1850(10)", 1850.5, 10, 10), ("1850.5 ± 0.2", 1850.5, 0.2, 0.2), ("11700 ± 99 b2k", -9700, 99, 99), ("-500 ± 20", -499.5, 20, 20), ("11650 ± 50 cal BP", -9700, 50, 50),
    ("3000 ± 25 BC (2σ)", -2998.5, 12.5, 12.5),
]
RANGES = [
    ("450–400 BCE", (-449, -398)), ("450-400 BCE", (-449, -398)), ("450 — 400 BCE", (-449, -398)), ("450‒400 BCE", (-449, -398)), ("450−400 BCE", (-449, -398)), ("450 - 400 BCE", (-449, -398)), ("450 to 400 BCE", (-449, -398)),
    ("450 BCE – 400 BCE", (-449, -398)), ("from 450 to 400 BCE", (-449, -398)), ("between 450 and 400 BCE", (-449, -398)), ("50 BCE–20 CE", (-49, 21)), ("50 BC to AD 20", (-49, 21)), ("BC 450–400", (-449, -398)), ("AD 50–100", (50, 101)),
    ("12–9 ka", ago(12e3, 9e3)), ("12 ka–9 ka", ago(12e3, 9e3)), ("12 ka – 9", ago(12e3, 9e3)), ("2.4–2.1 Ga", ago(2.4e9, 2.1e9)), ("2.5 Ga – 540 Ma", ago(2.5e9, 540e6)), ("3.3 to 2.6 million years ago", ago(3.3e6, 2.6e6)),
    ("3 million to 2 million years ago", ago(3e6, 2e6)), ("12,000–11,500 BP", (-10050, -9550)), ("1.5–1.2 × 10⁹ years ago", ago(1.5e9, 1.2e9)), ("14–12 cal ka BP", (-12050, -10050)), ("66–0 Ma", ago(66e6, 0)),
    ("1914–1918", (1914, 1919)), ("1914-1918", (1914, 1919)), ("1914 - 1918", (1914, 1919)), ("1914 to 1918", (1914, 1919)), ("between 1914 and 1918", (1914, 1919)), ("from 1914 until 1918", (1914, 1919)), ("1914–18", (1914, 1919)),
    ("1914 to 18", (1914, 1919)), ("1985–9", (1985, 1990)), ("1703–04", (1703, 1705)), ("1914/1918", (1914, 1919)), ("-500 to -400", (-500, -399)), ("-500–-400", (-500, -399)), ("1850.5–1852.5", (1850.5, 1852.5)),
    ("1850s–60s", (1850, 1870)), ("2nd/3rd century", (101, 301)), ("5th century – 480", (401, 481)), ("1850s–1855", (1850, 1856)),
    ("1667 or 1668", (1667, 1669)), ("1850–present", (1850, 2025)), ("1850s–1870s", (1850, 1880)), ("5th–4th century BCE", (-499, -299)), ("5th century BCE to 3rd century CE", (-499, 301)), ("18th and 19th century", None),
    ("late 18th – early 19th century", (1768, 1834)), ("early to mid 19th century", (1801, 1868)), ("mid-to-late 19th century", (1834, 1901)), ("5th to 4th millennium BC", (-4999, -2999)), ("Jurassic to Cretaceous", ago(201.4e6, 66e6)),
    ("28 July 1914 – 11 November 1918", (day(1914, 7, 28)[0], day(1918, 11, 11)[1])), ("12–15 April 1961", (day(1961, 4, 12)[0], day(1961, 4, 15)[1])), ("April 12–15, 1961", (day(1961, 4, 12)[0], day(1961, 4, 15)[1])),
    ("March–April 1961", (month_bounds(1961, 3)[0], month_bounds(1961, 4)[1])), ("from May to July 1848", (month_bounds(1848, 5)[0], month_bounds(1848, 7)[1])), ("1200–50 BCE", (-1199, -48)), ("50 BCE–120", (-49, 121)),
    ("c. 1850–1870", (1840.5, 1880.5)), ("c. 1850 – c. 1870", (1840.5, 1880.5)), ("c. 450–400 BCE", (-458.5, -388.5)), ("1848–c. 1853", (1848, 1858.5)), ("2004-06-11 to 2004-06-13", (day(2004, 6, 11)[0], day(2004, 6, 13)[1])),
]
WORDS = [
    # circa: one unit of the last significant digit, five years at least (choice of this tool; published rules differ)
    ("c. 1850", (1840.5, 1860.5)), ("c.1985", (1980.5, 1990.5)), ("c1850", (1840.5, 1860.5)), ("ca. 1853", (1848.5, 1858.5)), ("ca 1853", (1848.5, 1858.5)), ("circa 1853", (1848.5, 1858.5)), ("about 1853", (1848.5, 1858.5)),
    ("approx. 1853", (1848.5, 1858.5)), ("approximately 1853", (1848.5, 1858.5)), ("around 1853", (1848.5, 1858.5)), ("~1853", (1848.5, 1858.5)), ("≈1853", (1848.5, 1858.5)), ("? 1853", (1848.5, 1858.5)), ("?1853", (1848.5, 1858.5)),
    ("probably 1853", (1848.5, 1858.5)), ("1853 (circa)", (1848.5, 1858.5)), ("1853 ca.", (1848.5, 1858.5)), ("c. 1900", (1800.5, 2000.5)), ("c. 500 BCE", (-508.5, -488.5)), ("c. 10,000 BCE", (-10998.5, -8998.5)),
    ("c. AD 850", (840.5, 860.5)), ("about 12 ka", ago(13e3, 11e3)), ("c. 66 Ma", ago(67e6, 65e6)), ("c. 1850s", (1845, 1865)), ("probably late 12th century", (1151.5, 1217.5)), ("c. 5th century BCE", (-549, -349)),
    # a question mark behind qualifies and does not widen (ISO 8601-2)
    ("1853?", (1853, 1854)), ("1853 ?", (1853, 1854)), ("44 BCE?", (-43, -42)), ("66.0 Ma (?)", ago(66.05e6, 65.95e6)), ("c. 1850?", (1840.5, 1860.5)),
    ("1850s", (1850, 1860)), ("the 1850s", (1850, 1860)), ("1850's", (1850, 1860)), ("1850’s", (1850, 1860)), ("1850s BCE", (-1858, -1848)), ("early 1850s", (1850, 1853)), ("mid-1850s", (1853, 1857)), ("late 1850s", (1857, 1860)),
    ("XIXth century", (1801, 1901)), ("19th century", (1801, 1901)), ("nineteenth century", (1801, 1901)), ("XIX century", (1801, 1901)), ("19th c.", (1801, 1901)), ("19th-century", (1801, 1901)), ("the 19th century", (1801, 1901)), ("5th century BC", (-499, -399)),
    ("5th c. BCE", (-499, -399)), ("5th cent. AD", (401, 501)), ("third millennium BCE", (-2999, -1999)), ("2nd millennium CE", (1001, 2001)), ("early 5th century BCE", (-499, -466)), ("late 3rd millennium BC", (-2332, -1999)),
    ("first half of the 19th century", (1801, 1851)), ("2nd half of the 5th century BCE", (-449, -399)), ("first third of the 19th century", (1801, 1834)), ("last third of the 19th century", (1868, 1901)),
    ("third quarter of the 18th century", (1751, 1776)), ("last quarter of the 5th century BC", (-424, -399)), ("first half of 1848", (1848, 1848.5)), ("early 1848", (1848, 1848 + 1 / 3)), ("mid 19th century", (1834, 1868)),
    ("first half of the 1850s", (1850, 1855)), ("late Cretaceous", ago(100.5e6, 66e6)), ("Cretaceous", ago(143.1e6, 66e6)), ("the Cretaceous period", ago(143.1e6, 66e6)), ("Holocene", ago(11700, 0)), ("Early Paleogene", ago(66e6, 66e6 - 42.96e6 / 3)),
    ("Ediacaran", ago(635e6, 538.8e6)), ("MESOZOIC", ago(251.902e6, 66e6)),
    ("at most 12 ka", (2024 - 12e3, 2025)), ("less than 3 million years ago", (2024 - 3e6, 2025)),
    ("after 1850", (1851, 2025)), ("since 1850", (1850, 2025)), ("post 1850", (1851, 2025)), ("post-1850", (1851, 2025)), ("1850 or later", (1850, 2025)), ("from 1850", (1850, 2025)), ("not before 1850", (1850, 2025)), (">1850", (1851, 2025)), ("≥ 1850", (1850, 2025)),
    ("<66 Ma", (2024 - 66e6, 2025)), ("after 66 Ma", (2024 - 66e6, 2025)), ("younger than 66 Ma", (2024 - 66e6, 2025)), ("1850 onwards", (1850, 2025)), ("terminus post quem 79", (79, 2025)), ("after 12 April 1961", (day(1961, 4, 12)[1], 2025)),
]
DAYS = [
    ("1961-04-12", day(1961, 4, 12)), ("12 April 1961", day(1961, 4, 12)), ("April 12, 1961", day(1961, 4, 12)), ("April 12 1961", day(1961, 4, 12)), ("12 Apr 1961", day(1961, 4, 12)), ("12 Apr. 1961", day(1961, 4, 12)),
    ("12th April 1961", day(1961, 4, 12)), ("12th of April, 1961", day(1961, 4, 12)), ("April 12th, 1961", day(1961, 4, 12)), ("12-Apr-1961", day(1961, 4, 12)), ("1961 April 12", day(1961, 4, 12)), ("Wednesday, 12 April 1961", day(1961, 4, 12)),
    ("Wed 12 Apr 1961", day(1961, 4, 12)), ("12 APRIL 1961", day(1961, 4, 12)), ("on 12 April 1961", day(1961, 4, 12)), ("15 March 44 BCE", day(-43, 3, 15)), ("15 March 44 B.C.", day(-43, 3, 15)), ("24 August AD 79", day(79, 8, 24)), ("4 Sept. 1882", day(1882, 9, 4)),
    ("April 1961", month_bounds(1961, 4)), ("Apr. 1961", month_bounds(1961, 4)), ("April, 1961", month_bounds(1961, 4)), ("1961 April", month_bounds(1961, 4)), ("04/1961", month_bounds(1961, 4)), ("May 1848", month_bounds(1848, 5)),
    ("13/04/1848", day(1848, 4, 13)), ("04/13/1848", day(1848, 4, 13)), ("13.4.1848", day(1848, 4, 13)), ("13-04-1848", day(1848, 4, 13)), ("1848/04/13", day(1848, 4, 13)), ("1848.04.13", day(1848, 4, 13)), ("4/4/1848", day(1848, 4, 4)),
    ("1969-07-20 20:17:40", day(1969, 7, 20)), ("1969-07-20T20:17Z", day(1969, 7, 20)), ("July 20, 1969 20:17 UTC", day(1969, 7, 20)), ("1969-07-20 00:00:00", day(1969, 7, 20)),
    ("20/07/1969 20:17", day(1969, 7, 20)), ("Q3 1969", (month_bounds(1969, 7)[0], month_bounds(1969, 9)[1])), ("1969Q3", (month_bounds(1969, 7)[0], month_bounds(1969, 9)[1])),
    ("spring 1848", (month_bounds(1848, 3)[0], month_bounds(1848, 5)[1])), ("summer of 1848", (month_bounds(1848, 6)[0], month_bounds(1848, 8)[1])), ("Autumn 1848", (month_bounds(1848, 9)[0], month_bounds(1848, 11)[1])),
    ("winter 1848", (month_bounds(1848, 12)[0], month_bounds(1849, 2)[1])), ("1961-04-12T06:07:00Z", day(1961, 4, 12)), ("25 October 1917 O.S.", day(1917, 11, 7)),
]
UNIFORM = [row for row in (*CALENDAR, *ERAS, *AGES, *RANGES, *WORDS, *DAYS) if row[1] is not None]


@pytest.mark.parametrize(("text", "bounds"), UNIFORM)
def test_uniform(text: str, bounds: tuple[float, float]) -> None:
    dating = read(text, Settings(compiled=2024)).dating
    assert dating.shape == "uniform"
    assert (dating.earliest, dating.latest) == pytest.approx(bounds, rel=1e-15, abs=1e-9)
    assert dating.best == pytest.approx(sum(bounds) / 2, rel=1e-15, abs=1e-9)


@pytest.mark.parametrize(("text", "age", "older", "younger"), [row for row in ERRORS if row[1] is not None])
def test_ages_with_errors(text: str, age: float, older: float, younger: float) -> None:
    dating = read(text, Settings(compiled=2024)).dating
    assert dating.shape == "normal"
    assert dating.best == pytest.approx(2024 - age, rel=1e-15)
    assert dating.earliest == pytest.approx(2024 - age - Z * older, rel=1e-12)
    assert dating.latest == pytest.approx(2024 - age + Z * younger, rel=1e-12)


@pytest.mark.parametrize(("text", "best", "before", "after"), DATED_ERRORS)
def test_years_with_errors(text: str, best: float, before: float, after: float) -> None:
    dating = read(text, Settings(compiled=2024)).dating
    assert (dating.shape, dating.best) == ("normal", best)
    assert (dating.earliest, dating.latest) == pytest.approx((best - Z * before, best + Z * after), rel=1e-12)


@pytest.mark.parametrize(
    ("text", "bounds"),
    [("66 Ma (95% CI 66.3–65.8)", (66.3e6, 65.8e6)), ("2.1 (95% CI 2.4–1.9) Ma", (2.4e6, 1.9e6)), ("2.1 Ma (95% HPD: 1.9-2.4 Ma)", (2.4e6, 1.9e6)), ("2.1 (95% HPD 1.9, 2.4 Ma)", (2.4e6, 1.9e6))],
)
def test_intervals(text: str, bounds: tuple[float, float]) -> None:
    dating = read(text, Settings(compiled=2024)).dating
    assert dating.shape == "normal"
    assert (dating.earliest, dating.latest) == (2024 - bounds[0], 2024 - bounds[1])


def test_enough_of_the_trade_is_covered() -> None:
    assert len({row[0] for row in (*UNIFORM, *ERRORS, *DATED_ERRORS)}) >= 150


# text, what the message must say, settings
REFUSED: list[tuple[str, str, dict[str, Any]]] = [
    ("", "is empty", {}), ("   ", "is empty", {}), ("-500 BCE", "gives the era twice", {}), ("-500 CE", "gives the era twice", {}), ("0 CE", "names a year 0", {}), ("0 BCE", "names a year 0", {}), ("AD 0", "names a year 0", {}),
    ("44.5 BCE", "part of a year", {}), ("-66 Ma", "counts back twice", {}), ("-0", "minus sign", {}), ("-0000", "minus sign", {}), ("400–450 BCE", "runs backwards", {}), ("450–400", "runs backwards", {}), ("9–12 ka", "runs backwards", {}),
    ("2008/1964", "runs backwards", {}), ("1918 to 1914", "runs backwards", {}), ("1899–01", "runs backwards", {}), ("20 CE–50 BCE", "runs backwards", {}), ("4th–5th century BCE", "runs backwards", {}), ("1985-1985", "to itself", {}),
    ("2026", "lies after the end of 2024", {"compiled": 2024}), ("2025", "lies after the end of 2024", {"compiled": 2024}), ("-66 Ma", "counts back twice", {"compiled": 2024}), ("1 January 2025", "lies after", {"compiled": 2024}),
    ("12/03/04", "day 12, month 03", {}), ("12/03/04", "two digits", {"day_order": "dmy"}), ("1703/04", "the years 1703 to 1704 (1703–1704), or month 4 of 1703", {}), ("1703/4", "Old Style", {}), ("1914/18", "write the years 1914 to 1918 as 1914–1918", {}),
    ("03/04/1848", "1848-04-03 (dmy) or 1848-03-04 (mdy)", {}), ("03.04.1848", "is ambiguous", {}), ("1500s", "the century 1500–1599 or the decade 1500–1509", {}), ("1500s BCE", "is ambiguous", {}), ("80s", "names no century", {}), ("'80s", "no notation", {}),
    ("1985-13", "has no month 13", {}), ("1985-00", "has no month 00", {}), ("1914-18", "has no month 18", {}), ("1985-02-30", "no day of the calendar", {}), ("31 April 1961", "no 31 April 1961", {}), ("29 February 1900", "is no day", {}),
    ("13/13/1848", "in any order", {}), ("32.1.1848", "in any order", {}), ("Monday, 12 April 1961", "was a Wednesday", {}), ("19850412", "the day 1985-04-12", {}), ("13/1848", "no month 13", {}), ("04/13/1848", "order dmy", {"day_order": "dmy"}),
    ("12 ka", "which is not given", {}), ("500 years ago", "which is not given", {}), ("66.0003 Ma", "which is not given", {}), ("500 years", "may be a length", {}), ("66,04 Ma", "set decimal", {}), ("10.000.000 BP", "set decimal", {}),
    ("4500 ± 40 14C BP", "uncalibrated radiocarbon", {}), ("4500 14C yr BP", "uncalibrated radiocarbon", {}), ("4500 rcybp", "uncalibrated radiocarbon", {}), ("4500 RCYBP", "uncalibrated radiocarbon", {}), ("4500 uncal BP", "uncalibrated", {}),
    ("4500 ¹⁴C BP", "uncalibrated radiocarbon", {}), ("4500 radiocarbon years BP", "uncalibrated", {}), ("4500 C14 BP", "uncalibrated", {}), ("4500±40 BP (uncalibrated)", "uncalibrated", {}), ("4500 conventional BP", "uncalibrated", {}),
    ("450 BCE–400", "write the era at both ends", {}), ("331–23 BCE", "write the second year in full", {}), ("1850 ± 10 yr", "is ambiguous", {"compiled": 2024}), ("66.0 ± 0 Ma", "error of 0", {}), ("1850 ± 5 %", "per cent of a calendar year", {}),
    ("before 1850", "has no early end", {}), ("pre-1850", "has no early end", {}), ("1984~?", "no notation", {}), ("1985-04-12?~", "no notation", {}), ("after 1850", "has no late end", {}), ("until 1850", "has no early end", {}), ("> 40 ka", "has no early end", {}), ("../1985", "has no early end", {}), ("1450-40 BCE", "ISO 8601's", {}),
    ("9 May", "no certain year", {}), ("12 April 61", "no certain year", {}), ("C19", "or century 19", {}), ("1969a", "with a letter", {}), ("04.1985", "a month and year", {}), ("20 c.", "no notation", {}),
    ("1969-07-20 25:17", "no notation", {}), ("at least 3.5 Ga", "has no early end", {}), ("66.0 ± 0.1–65 Ma", "error at the end of a range", {}), ("after 2024", "check the limits", {"compiled": 2024}),
    ("0th century", "names a century 0", {}), ("turn of the 19th century", "early, mid or late", {}), ("unknown", "it has no number", {}), ("n.d.", "it has no number", {}), ("unknown/2006", "older draft", {}), ("198u", "older draft", {}),
    ("{1667, 1668}", "without spaces", {}), ("1667..1672", "without spaces", {}), ("1e15000", "no notation", {}), ("9999999999999999", "beyond", {}), ("1" * 300, "longer than 200", {}), ("<b>1985</b>", "no notation", {}), ("1985; 1986", "no notation", {}),
    ("nan", "it has no number", {}), ("inf", "it has no number", {}), ("1985-04-12/open", "older draft", {}), ("50 March 1848", "no 50 March", {}), ("2.1 Ma (90% CI 1.9–2.4)", "90 % interval", {}), ("2.1 Ma (95% CI 2.2–2.4)", "outside its own interval", {}),
]


@pytest.mark.parametrize(("text", "says", "given"), REFUSED)
def test_refused_with_the_reason(text: str, says: str, given: dict[str, Any]) -> None:
    with pytest.raises(DateRefused) as refusal:
        read(text, Settings(**given))
    message = str(refusal.value)
    assert says in message
    assert "\n" not in message
    assert text.strip()[:20] in message or "¹" in text or not text.strip()


def test_ages_need_a_compile_year_unless_it_cannot_matter() -> None:
    reading = read("66.0 Ma")
    assert reading.notation == "ago, from 2000"
    assert reading.dating.best == 2000 - 66e6
    assert "compile year is not given" in reading.remarks[0]
    assert read("12–9 ka").notation == "range, from 2000"
    assert read("Cretaceous").notation == "period, from 2000"
    assert read("11650 BP") == read("11650 BP", Settings(compiled=2024))


def test_bounds_past_the_compile_year_are_cut_and_noted() -> None:
    reading = read("c. 2020", Settings(compiled=2024))
    assert (reading.dating.earliest, reading.dating.best, reading.dating.latest) == (2010.5, 2017.75, 2025.0)
    assert "was cut at the end of the compile year 2024" in reading.remarks[0]
    normal = read("2020 ± 10", Settings(compiled=2024)).dating
    assert (normal.best, normal.latest, normal.shape) == (2020.5, 2025.0, "normal")
    assert read("2024", Settings(compiled=2024)).dating.latest == 2025.0
