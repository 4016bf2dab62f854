"""Walking trees, ordering definitions, the nearest known name."""

import pytest

from specterm.language import parse, parse_expression
from specterm.language.order import bottom_up, in_order, names, walk
from specterm.language.suggest import nearest


def ordered(text: str):
    """Return the order and the cycle of a sheet's definitions."""
    return in_order({item.name: item.expression for item in parse(text).definitions})


def test_names_are_found_from_left_to_right():
    """Names used are found, names of called functions are not."""
    assert [name.name for name in names(parse_expression("a*sin(b + c) < -d^e"))] == ["a", "b", "c", "d", "e"]


def test_bottom_up_holds_every_node_once():
    """From the bottom up every node stands behind those inside it."""
    node = parse_expression("a*sin(b + c) < -d^e")
    found = bottom_up(node)
    assert found[-1] is node
    assert {id(inner) for inner in found} == {id(inner) for inner in walk(node)}


def test_definitions_stand_behind_what_they_use():
    """The order of the definitions in the sheet does not matter."""
    order, cycle = ordered("a = b + c; b = c; c = 1; d = a")
    assert cycle == ()
    assert [order.index(name) for name in "cbad"] == sorted(order.index(name) for name in "cbad")


@pytest.mark.parametrize(
    ("text", "cycle"), [("a = a", "aa"), ("a = b; b = c; c = a", "abca"), ("z = a; a = b + 1; b = 2*a", "aba")]
)
def test_cycle_is_found(text, cycle):
    """The first cycle is given in the order of use, and all names are ordered all the same."""
    order, found = ordered(text)
    assert found == tuple(cycle)
    assert sorted(order) == sorted(item.name for item in parse(text).definitions)


def test_long_chain_of_definitions_needs_no_recursion():
    """Twenty thousand definitions, each using the next, are ordered."""
    order, cycle = ordered("\n".join(f"a{k} = a{k + 1}" for k in range(19_999)) + "\na19999 = 1")
    assert (order[0], order[-1], cycle) == ("a19999", "a0", ())


@pytest.mark.parametrize(
    ("name", "known", "found"),
    [
        ("kapa", ["kappa", "gap"], "kappa"),
        ("sinn", ["sin", "sinh", "cos"], "sin"),
        ("Omega", ["omega", "omega2"], "omega"),
        ("me", ["m_e", "m_p"], "m_e"),
        ("lenght", ["length", "energy"], "length"),
        ("V0", ["V1", "W"], None),
        ("q", ["x", "y"], None),
        ("potential", ["phase"], None),
        ("x" * 100_000, ["xx", "y" * 100_000], None),
    ],
)
def test_nearest(name, known, found):
    """A name off by case, an underscore or few letters is found; short or far ones are not guessed."""
    assert nearest(name, known) == found
