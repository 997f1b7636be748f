"""Hold the elimination against Gaussian elimination in exact fractions, which knows no rounding."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.network.elimination import Factor, NotGroundedError

# From a link of 10 micro-ohm to a sense wire of 100 ohm. The doubles are taken over into fractions exactly.
SIEMENS = st.floats(-2.0, 5.0).map(lambda exponent: 10.0**exponent)
CURRENTS_A = st.one_of(st.just(0.0), st.floats(-500.0, -0.001), st.floats(0.001, 500.0))
# Nothing is subtracted in the elimination, so that no digit is lost however far apart the links are.
AGREES = 1e-13

Link = tuple[int, int, float]


@dataclass(frozen=True)
class Grounded:
    """Hold a network of conductances in which every place is joined to a ground."""

    size: int
    links: tuple[Link, ...]
    grounded: tuple[int, ...]
    injected_a: tuple[float, ...]

    @property
    def factor(self) -> Factor:
        """Return it factorised."""
        return Factor(self.size, self.links, self.grounded)

    @property
    def free(self) -> list[int]:
        """Return the places that are not grounded."""
        return [place for place in range(self.size) if place not in self.grounded]


@st.composite
def grounded(draw: st.DrawFn) -> Grounded:
    """Draw trees on one or two grounds, with loops, parallel links and links from a place to itself; any order."""
    size = draw(st.integers(1, 8))
    grounds = draw(st.integers(1, min(2, size)))
    order = draw(st.permutations(range(size)))
    links = [(order[draw(st.integers(0, place - 1))], order[place], draw(SIEMENS)) for place in range(grounds, size)]
    place = st.integers(0, size - 1)
    links += draw(st.lists(st.tuples(place, place, SIEMENS), max_size=8))
    injected = [draw(CURRENTS_A) for _ in range(size)]
    return Grounded(size, tuple(draw(st.permutations(links))), tuple(order[:grounds]), tuple(injected))


def exact_matrix(case: Grounded) -> list[list[Fraction]]:
    """Return the conductance matrix of the places that are not grounded."""
    at = {place: row for row, place in enumerate(case.free)}
    matrix = [[Fraction(0)] * len(at) for _ in at]
    for a, b, siemens in case.links:
        for near, far in ((a, b), (b, a)):
            if a != b and near in at:
                matrix[at[near]][at[near]] += Fraction(siemens)
                if far in at:
                    matrix[at[near]][at[far]] -= Fraction(siemens)
    return matrix


def exact_inverse(matrix: list[list[Fraction]]) -> list[list[Fraction]]:
    """Return the inverse by Gauss and Jordan."""
    size = len(matrix)
    rows = [[*row, *(Fraction(int(i == j)) for j in range(size))] for i, row in enumerate(matrix)]
    for column in range(size):
        pivot = next(r for r in range(column, size) if rows[r][column])
        rows[column], rows[pivot] = rows[pivot], rows[column]
        rows[column] = [value / rows[column][column] for value in rows[column]]
        for other in range(size):
            factor = rows[other][column]
            if other != column and factor:
                rows[other] = [x - factor * y for x, y in zip(rows[other], rows[column], strict=True)]
    return [row[size:] for row in rows]


def exact_volts(case: Grounded) -> list[object]:
    """Return what agrees with the exact voltage of each place.

    Relative to what the currents would make if none were taken from another: their own digits.
    """
    volts: list[object] = [0.0] * case.size
    for place, row in zip(case.free, exact_inverse(exact_matrix(case)), strict=True):
        parts = [ohm * Fraction(case.injected_a[other]) for ohm, other in zip(row, case.free, strict=True)]
        tolerance = AGREES * float(sum(map(abs, parts), Fraction(0)))
        volts[place] = pytest.approx(float(sum(parts, Fraction(0))), rel=0, abs=tolerance)
    return volts


@settings(max_examples=150, deadline=None)
@given(grounded())
def test_the_voltages_are_the_exact_ones(case: Grounded) -> None:
    assert case.factor.solve(case.injected_a) == exact_volts(case)


@settings(max_examples=150, deadline=None)
@given(grounded())
def test_the_resistance_to_the_ground_is_the_diagonal_of_the_exact_inverse(case: Grounded) -> None:
    inverse = exact_inverse(exact_matrix(case))
    expected = [0.0] * case.size
    for row, place in enumerate(case.free):
        expected[place] = float(inverse[row][row])
    found = case.factor.own_resistance()
    assert found == [pytest.approx(ohm, rel=AGREES) for ohm in expected]


@settings(max_examples=100, deadline=None)
@given(grounded(), st.data())
def test_the_voltages_at_a_few_places_are_the_exact_ones(case: Grounded, data: st.DataObject) -> None:
    place = st.integers(0, case.size - 1)
    injected = data.draw(st.dictionaries(place, CURRENTS_A, max_size=3))
    wanted = data.draw(st.lists(place, max_size=4))
    whole = Grounded(case.size, case.links, case.grounded, tuple(injected.get(p, 0.0) for p in range(case.size)))
    volts = exact_volts(whole)
    found = case.factor.solve_at(injected, wanted)
    assert {p: found[p] for p in wanted} == {p: volts[p] for p in wanted}


@settings(max_examples=100, deadline=None)
@given(grounded(), st.data())
def test_the_resistance_between_two_places_is_the_exact_one(case: Grounded, data: st.DataObject) -> None:
    first, second = data.draw(st.integers(0, case.size - 1)), data.draw(st.integers(0, case.size - 1))
    inverse = exact_inverse(exact_matrix(case))
    at = {place: row for row, place in enumerate(case.free)}

    def entry(a: int, b: int) -> Fraction:
        return inverse[at[a]][at[b]] if a in at and b in at else Fraction(0)

    exact = entry(first, first) + entry(second, second) - 2 * entry(first, second)
    assert case.factor.resistance_ohm(first, second) == pytest.approx(float(exact), rel=1e-9, abs=0)


def test_a_factor_serves_any_number_of_right_hand_sides() -> None:
    factor = Factor(3, [(0, 1, 10.0), (1, 2, 10.0)], [0])
    assert factor.solve([0.0, 0.0, 1.0]) == pytest.approx([0.0, 0.1, 0.2])
    assert factor.solve([5.0, 1.0, 0.0]) == pytest.approx([0.0, 0.1, 0.1])
    assert factor.solve([0.0, 0.0, 1.0]) == pytest.approx([0.0, 0.1, 0.2])


def test_links_in_parallel_add_up_and_a_link_from_a_place_to_itself_is_nothing() -> None:
    factor = Factor(2, [(0, 1, 3.0), (1, 0, 1.0), (1, 1, 100.0)], [0])
    assert factor.solve([0.0, 8.0]) == pytest.approx([0.0, 2.0])
    assert factor.own_resistance() == pytest.approx([0.0, 0.25])


def test_a_place_without_any_link_is_left_alone() -> None:
    factor = Factor(3, [(0, 1, 2.0)], [0])
    assert factor.own_resistance() == [0.0, 0.5, 0.0]
    assert factor.solve([0.0, 1.0, 0.0]) == [0.0, 0.5, 0.0]


def test_places_that_are_joined_to_no_ground_are_refused() -> None:
    with pytest.raises(NotGroundedError):
        Factor(4, [(0, 1, 2.0), (2, 3, 3.0)], [0])


@settings(max_examples=100, deadline=None)
@given(grounded())
def test_however_they_are_joined_places_without_a_ground_are_refused(case: Grounded) -> None:
    """A ground that is taken away leaves its places floating; what is left of their last pivot is rounding only."""
    floating = [link for link in case.links if link[0] != link[1]]
    if not floating:
        return
    with pytest.raises(NotGroundedError):
        Factor(case.size + 1, floating, [case.size])
