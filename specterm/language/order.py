"""Which names an expression uses, and an order in which definitions can be worked out; without Python recursion."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from specterm.language.nodes import Binary, Call, Compare, ForeignLevel, Name, Node, Unary


def children(node: Node) -> tuple[Node, ...]:
    """Return the expressions directly inside a node, from left to right."""
    match node:
        case Unary(operand=operand):
            return (operand,)
        case Binary(left=left, right=right):
            return left, right
        case Compare(operands=operands):
            return operands
        case Call(arguments=arguments):
            return arguments
        case ForeignLevel(index=index):
            return (index,)
    return ()


def walk(node: Node) -> Iterator[Node]:
    """Yield a node and everything inside it, from left to right."""
    stack = [node]
    while stack:
        node = stack.pop()
        yield node
        stack.extend(reversed(children(node)))


def bottom_up(node: Node) -> list[Node]:
    """Return a node and everything inside it, each behind what is inside it, from left to right."""
    found: list[Node] = []
    stack = [node]
    while stack:
        found.append(stack.pop())
        stack.extend(children(found[-1]))
    return found[::-1]


def names(node: Node) -> Iterator[Name]:
    """Yield every use of a name in an expression, from left to right; names of functions that are called do not count."""
    return (inner for inner in walk(node) if isinstance(inner, Name))


def in_order(expressions: Mapping[str, Node | Iterable[Node]]) -> tuple[list[str], tuple[str, ...]]:
    """Return the names ordered so that each stands behind those its expression uses, and the first cycle found, or ().

    A cycle is given as (a, b, c, a). All names are ordered all the same; a use that closes a cycle does not count.
    """
    uses = {name: _uses(item, expressions) for name, item in expressions.items()}
    order: list[str] = []
    cycle: tuple[str, ...] = ()
    state: dict[str, int] = {}
    for start in expressions:
        path = [start] if start not in state else []
        state.setdefault(start, 0)
        while path:
            name = path[-1]
            rest = uses[name]
            if not rest:
                order.append(name)
                state[name] = 1
                path.pop()
                continue
            used = rest.pop()
            if used not in state:
                state[used] = 0
                path.append(used)
            elif state[used] == 0 and not cycle:
                cycle = (*path[path.index(used) :], used)
    return order, cycle


def _uses(item: Node | Iterable[Node], known: Mapping[str, object]) -> list[str]:
    """Return the known names that one or several expressions use, each once, the first one last."""
    nodes = [item] if isinstance(item, Node) else list(item)
    used = dict.fromkeys(name.name for node in nodes for name in names(node) if name.name in known)
    return list(reversed(used))
