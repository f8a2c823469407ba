"""The equations of a network as a plain dense matrix over a large finite field.

Nothing here is shared with the library: every part gets a branch current for each of its
ports and a law in textbook form, values and the complex frequency are random residues.
A matrix of polynomials that is singular is singular here; one that is regular is regular
here but for a chance of about one in 10^17.
"""

from __future__ import annotations

import random

import networkx as nx

from acsolve.circuit.netlist import Netlist, Pair, Part

P = 2**61 - 1
_PORTS = {
    "opamp": ("23",),
    "voltage_amplifier": ("23",),
    "transconductance": ("23",),
    "transresistance": ("01", "23"),
    "current_amplifier": ("01", "23"),
    "transformer": ("01", "23"),
    "gyrator": ("01", "23"),
    "line": ("02", "13"),
    "measured": ("02", "12"),
}
_OPEN = {"capacitor": "value", "admittance": "value", "constant_phase": "coefficient"}

Row = dict[str, int]


def _zero(part: Part, attribute: str) -> bool:
    value = part.values.get(attribute)
    expression = getattr(value, "expression", None)
    return getattr(expression, "value", None) == 0


def _ports(part: Part) -> list[Pair]:
    ports = [
        (part.nodes[int(port[0])], part.nodes[int(port[1])])
        for port in _PORTS.get(part.kind, ("01",))
    ]
    if "input_resistance" in part.values:
        ports.append((part.nodes[0], part.nodes[1]))
    return ports


def groups(netlist: Netlist, joined: list[Pair], *, sources: bool) -> dict[str, str]:
    """The reference of each node: the first by name of those that conduction joins."""
    graph = nx.Graph()
    for part in netlist.parts:
        graph.add_nodes_from(part.nodes)
        idle = part.kind == "current_source" and not sources
        if not idle and not _zero(part, _OPEN.get(part.kind, "")):
            graph.add_edges_from(_ports(part))
    graph.add_edges_from(joined)
    found = {}
    for members in nx.connected_components(graph):
        reference = "gnd" if "gnd" in members else min(members)
        found |= dict.fromkeys(members, reference)
    return found


class Dense:
    """One question's equations; `value` holds every unknown, or None where not unique."""

    def __init__(
        self,
        netlist: Netlist,
        drive: Pair | None,
        *,
        voltage: bool = True,
        short: Pair | None = None,
        levels: dict[str, int] | None = None,
        seed: int = 1,
    ) -> None:
        self.random = random.Random(seed)
        self.rows: list[Row] = []
        self.currents: list[str] = []
        self.balances: dict[str, Row] = {}
        self.own = drive is None
        joined = [pair for pair in (drive, short) if pair]
        self.reference = groups(netlist, joined, sources=self.own)
        for part in netlist.parts:
            replaced = part.kind == "voltage_source" and drive and set(part.nodes) == set(drive)
            if not replaced:
                self._stamp(part, netlist)
        if drive:
            current = self._branch("drive", (drive[1], drive[0]))
            law = self._across(drive) if voltage else {current: 1}
            self.rows.append({**law, "1": P - 1})
        if short:
            self._branch("short", short)
            self.rows.append(self._across(short))
        for node, reference in self.reference.items():
            level = (levels or {}).get(node, 0) if node == reference else 0
            if node == reference:
                self.rows.append({f"V({node})": 1, "1": -level % P})
            else:
                self.rows.append(self.balances.get(node, {}))
        self.value = solve(self.rows, [*(f"V({node})" for node in self.reference), *self.currents])

    def voltage(self, pair: Pair) -> int:
        """The voltage of a pair of the solved network."""
        assert self.value is not None
        return (self.value[f"V({pair[0]})"] - self.value[f"V({pair[1]})"]) % P

    def _branch(self, name: str, pair: Pair) -> str:
        self.currents.append(f"I({name})")
        for node, sign in zip(pair, (1, -1), strict=True):
            balance = self.balances.setdefault(node, {})
            balance[f"I({name})"] = balance.get(f"I({name})", 0) + sign
        return f"I({name})"

    def _across(self, pair: Pair, factor: int = 1) -> Row:
        row: Row = {}
        for node, sign in zip(pair, (1, -1), strict=True):
            row[f"V({node})"] = row.get(f"V({node})", 0) + sign * factor
        return row

    def _sum(self, *rows: Row) -> Row:
        total: Row = {}
        for row in rows:
            for name, factor in row.items():
                total[name] = (total.get(name, 0) + factor) % P
        return total

    def _draw(self, part: Part, attribute: str = "value") -> int:
        number = self.random.randrange(1, P)
        return 0 if _zero(part, attribute) else number

    def _stamp(self, part: Part, netlist: Netlist) -> None:  # noqa: PLR0912 (one case a kind)
        ports = _ports(part)
        currents = [self._branch(f"{part.name}/{at}", port) for at, port in enumerate(ports)]
        x = self._draw(part, next(iter(part.values), "value"))
        y = self._draw(part, "")
        across, current = self._across(ports[0]), currents[0]
        inputs = self._across((part.nodes[0], part.nodes[1]))
        scaled = {name: factor * x for name, factor in inputs.items()}
        put = self.rows.append
        match part.kind:
            case "capacitor" | "admittance" | "constant_phase":
                put(self._sum({n: f * x for n, f in across.items()}, {current: -1}))
            case "voltage_source":
                put(self._sum(across, {"1": x} if self.own else {}))
            case "current_source":
                put({current: 1, "1": -x if self.own else 0})
            case "ammeter":
                put(across)
            case "inductor":
                put(self._sum(across, {current: -x}, self._mutual(part, netlist)))
            case "opamp" if "open_loop_gain" not in part.values:
                put(inputs)
            case "opamp":
                loss = {current: y} if "output_resistance" in part.values else {}
                put(self._sum(across, {n: f * 7 for n, f in inputs.items()}, loss))
            case "voltage_amplifier":
                put(self._sum(across, {n: -f for n, f in scaled.items()}))
            case "transconductance":
                put(self._sum({current: 1}, scaled))
            case "transresistance":
                put(across)
                put(self._sum(self._across(ports[1]), {current: -x}))
            case "current_amplifier":
                put(across)
                put({currents[1]: 1, current: x})
            case "transformer":
                put(self._sum(across, self._across(ports[1], -x)))
                put({currents[1]: 1, current: x})
            case "gyrator":
                put(self._sum({current: 1}, self._across(ports[1], -x)))
                put(self._sum({currents[1]: 1}, self._across(ports[0], x)))
            case "line":
                for here, there in ((0, 1), (1, 0)):
                    put(
                        self._sum(
                            self._across(ports[here]),
                            {currents[here]: -x, currents[there]: -x * y},
                            self._across(ports[there], -y),
                        )
                    )
            case "measured":
                for here, there, factor in ((0, 1, 3), (1, 0, 5)):
                    drops = {currents[here]: -x * factor, currents[there]: -y * factor}
                    put(self._sum(self._across(ports[here]), drops))
            case _:
                put(self._sum(across, {current: -x}))
        if "input_resistance" in part.values:
            put(self._sum(self._across(ports[-1]), {currents[-1]: -y * 3}))

    def _mutual(self, part: Part, netlist: Netlist) -> Row:
        row: Row = {}
        for item in netlist.couplings:
            if part.name in (item.first, item.second):
                other = item.second if part.name == item.first else item.first
                row[f"I({other}/0)"] = 12345
        return row


def solve(rows: list[Row], names: list[str]) -> dict[str, int] | None:
    """The unique solution of homogeneous rows with the unknown "1" set to one, or None."""
    assert len(rows) == len(names), (len(rows), names)
    columns = [*names, "1"]
    matrix = [[row.get(name, 0) % P for name in columns] for row in rows]
    size = len(names)
    for at in range(size):
        pivot = next((row for row in range(at, size) if matrix[row][at]), None)
        if pivot is None:
            return None
        matrix[at], matrix[pivot] = matrix[pivot], matrix[at]
        inverse = pow(matrix[at][at], -1, P)
        matrix[at] = [item * inverse % P for item in matrix[at]]
        for row in range(size):
            factor = matrix[row][at]
            if row != at and factor:
                matrix[row] = [
                    (item - factor * head) % P
                    for item, head in zip(matrix[row], matrix[at], strict=True)
                ]
    return {name: -matrix[at][-1] % P for at, name in enumerate(names)}
