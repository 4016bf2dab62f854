"""The names of a sheet and what they stand for: resolved on demand in any order, cycles found, misspellings helped."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace
from typing import TYPE_CHECKING

from specterm.language.catalogue import refuse
from specterm.language.nodes import Definition, LayersBlock, Name, Node, Sheet, Table
from specterm.language.suggest import nearest
from specterm.model.calls import KNOWN
from specterm.model.domain import Domain
from specterm.model.layers import Layers, build_layers
from specterm.model.operator import differentiation, momentum
from specterm.model.resolve import Context, forbid_levels, names_in, resolve
from specterm.model.scalar import Scalar, written
from specterm.model.setting import Setting
from specterm.model.table import build_table
from specterm.model.term import COORDINATE, Term, constant
from specterm.model.values import Value, as_number, as_real
from specterm.units import UnitSystem

if TYPE_CHECKING:
    from pathlib import Path

_BLOCK = "layers "


class Scope:
    """Everything that has a name in one sheet. `values` holds what is resolved already, `used` the names met so far."""

    def __init__(
        self, sheet: Sheet, units: UnitSystem, folder: Path | None, coordinate: str, carries: Callable[[Node], bool]
    ) -> None:
        """Take the definitions of `sheet`; nothing is resolved yet. `carries` says whether an expression has a unit in it."""
        self.units, self.folder, self.carries = units, folder, carries
        self.labels: dict[int, str] = {}
        self.setting = Setting(written(units.hbar), coordinate, None, self.labels)
        self.definitions: dict[str, Definition] = {d.name: d for d in sheet.definitions}
        self.states = frozenset(s.name for s in sheet.states)
        self.blocks: dict[str, LayersBlock] = {f"{_BLOCK}{k}": b for k, b in enumerate(sheet.layers)}
        self.columns = {name: key for key, b in self.blocks.items() for name, _, _ in b.columns[1:]}
        self.layers: dict[str, Layers] = {}
        self.values: dict[str, Value] = {}
        self.used: set[str] = set()

    def set_hbar(self, value: Scalar) -> None:
        """Let p be -i hbar d/dx with this hbar from now on."""
        self.setting = replace(self.setting, hbar=value)

    def set_domain(self, domain: Domain) -> None:
        """Let operators and tables know the domain from now on."""
        self.setting = replace(self.setting, domain=domain)

    def value(self, node: Node) -> Value:
        """Return what an expression stands for, resolving the names in it first."""
        names = [n.name for n in names_in(node)]
        self.used.update(names)
        self.ensure(names)
        return resolve(node, Context(self.setting, self.units, self._look_up, self._table))

    def scalar(self, node: Node, what: str) -> Scalar:
        """Return the real, finite number an expression stands for."""
        term = as_real(self.value(node), what, node.span)
        as_number(term, what, node.span, self.setting.coordinate)
        return term.data if isinstance(term.data, Scalar) else written(0.0)

    def number(self, node: Node, what: str) -> float:
        """Return the real, finite number an expression stands for, as a float."""
        return as_number(self.value(node), what, node.span, self.setting.coordinate)

    def ensure(self, names: Iterable[str]) -> None:
        """Resolve the user's names among `names`, those they need first. Raises SheetError on a cycle."""
        stack = [(name, False) for name in names]
        path: dict[str, None] = {}
        while stack:
            key, ready = self._key(stack[-1][0]), stack[-1][1]
            if key is None or key in self.values or key in self.layers:
                stack.pop()
            elif ready:
                stack.pop()
                del path[key]
                self._resolve(key)
            else:
                self._check_cycle(key, path)
                stack[-1] = (key, True)
                path[key] = None
                stack.extend((need, False) for need in self._needs(key))

    def _key(self, name: str) -> str | None:
        """Return the definition or block a name comes from, None for built-in and unknown names."""
        if name in self.definitions or name in self.blocks:
            return name
        return self.columns.get(name)

    def _check_cycle(self, key: str, path: dict[str, None]) -> None:
        if key in path:
            names = list(path)
            circle = [*names[names.index(key) :], key]
            first = next((k for k in circle if k in self.definitions), None)
            span = self.definitions[first].name_span if first else self.blocks[key].span
            shown = " -> ".join("layers" if k in self.blocks else k for k in circle)
            raise refuse("cycle", span, name=first or "a layer", path=shown)

    def _needs(self, key: str) -> list[str]:
        if key in self.definitions:
            nodes: list[Node] = [self.definitions[key].expression]
        else:
            block = self.blocks[key]
            nodes = [cell for row in block.rows for cell in row] + ([block.start] if block.start else [])
        names = [n.name for node in nodes for n in names_in(node)]
        self.used.update(names)
        return [n for n in names if n != self.setting.coordinate]

    def _resolve(self, key: str) -> None:
        if key in self.blocks:
            self.layers[key] = build_layers(self.blocks[key], self.units, self.scalar, self.carries)
            for name, term in self.layers[key].columns.items():
                self._keep(name, term)
            return
        expression = self.definitions[key].expression
        forbid_levels(expression)
        self._keep(key, resolve(expression, Context(self.setting, self.units, self._look_up, self._table)))

    def _keep(self, name: str, value: Value) -> None:
        self.values[name] = value
        if isinstance(value, Term) and value.varies and value != COORDINATE:
            self.labels.setdefault(value.digest, name)

    def _look_up(self, node: Name) -> Value:
        name = node.name
        if name == self.setting.coordinate:
            return COORDINATE
        if name in self.values:
            return self.values[name]
        built_in = self._built_in(name)
        if built_in is not None:
            return built_in
        if name == "inf":
            raise refuse("infinity-place", node.span)
        if name in self.states:
            raise refuse("state-as-value", node.span, name=name)
        raise refuse("unknown-name", node.span, name=name, near=nearest(name, self._known()))

    def _built_in(self, name: str) -> Value | None:
        coordinate = self.setting.coordinate
        if name in ("p", f"p{coordinate}"):
            return momentum(self.setting)
        if name in ("D", f"D{coordinate}"):
            return differentiation(self.setting)
        if name == "hbar":
            return constant(self.setting.hbar)
        if name == "pi":
            return constant(Scalar(3.141592653589793, 1.23e-16))
        if name == "i":
            return constant(1j)
        found = self.units.constant(name)
        return None if found is None else constant(written(found[0]))

    def _known(self) -> list[str]:
        return [self.setting.coordinate, *self.definitions, *self.columns, "p", "D", "pi", "i", "hbar", *KNOWN]

    def _table(self, node: Table) -> Term:
        return build_table(node, self.folder, self.units, self.setting.domain)
