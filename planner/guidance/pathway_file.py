"""Reads and checks pathway files: every node reached, every branch there, no circle, facts known, sources given."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal, cast, get_args

from planner.catalogue import profile_names, read_own_profile, read_profile
from planner.errors import ProfileError
from planner.guidance.facts import FACTS

FOLDER = "pathways"
AdviceKind = Literal[
    "none_advised", "oxygen", "oxygen_usual_plus", "challenge", "challenge_on_oxygen", "walk_test", "individual",
    "against", "refer", "not_for",
]  # fmt: skip
FORBIDDEN_WORDS = ("safe to", "fit to fly", "fit for travel", "cleared")
_NODE_KEYS = {
    "question", "fact", "below", "then", "otherwise", "yes", "no", "choices", "other", "not_known", "advice", "kind",
    "flow_l_min", "flow_plus_l_min", "source", "seen",
}  # fmt: skip


@dataclass(frozen=True)
class FlowRule:
    """The flow a pathway names: a fixed one, or the usual one and so much more. It is a rule, not a decision."""

    kind: Literal["fixed", "usual_plus"]
    l_min: float


@dataclass(frozen=True)
class Branch:
    """One way out of a node."""

    to: str
    answer: str
    below: float | None = None
    at_least: float | None = None
    equals: frozenset[str] | bool | None = None

    def holds(self, value: float | bool | str) -> bool:
        """Whether the fact takes this branch."""
        if self.below is not None:
            return float(value) < self.below
        if self.at_least is not None:
            return float(value) >= self.at_least
        if isinstance(self.equals, frozenset):
            return not self.equals or value in self.equals
        return value is self.equals


@dataclass(frozen=True)
class Node:
    """A question with its branches, or advice."""

    name: str
    question: str
    fact: str
    branches: tuple[Branch, ...]
    not_known: str | None
    advice: str | None
    advice_kind: AdviceKind
    flow_rule: FlowRule | None
    source: str
    seen: bool


@dataclass(frozen=True)
class Pathway:
    """A checked pathway."""

    id: str
    title: str
    version: int
    source: str
    start: str
    nodes: Mapping[str, Node]


def load_pathways() -> dict[str, Pathway]:
    """Every pathway by id; the service's own file of a name replaces the packaged one. Raises ProfileError."""
    pathways: dict[str, Pathway] = {}
    for name in profile_names(FOLDER):
        own = read_own_profile(name)
        pathway = _checked(name, own if own is not None else read_profile(name))
        if pathway.id in pathways:
            raise ProfileError(name, "id", f"the pathway {pathway.id!r} stands in another file too")
        pathways[pathway.id] = pathway
    return pathways


_kept: dict[str, tuple[Mapping[str, Any], Pathway]] = {}


def _checked(name: str, table: Mapping[str, Any]) -> Pathway:
    """read_pathway, once for a table: the catalogue gives the same table again while the file's text is the same."""
    kept = _kept.get(name)
    if kept is None or kept[0] is not table:
        kept = _kept[name] = (table, read_pathway(name, table))
    return kept[1]


def read_pathway(name: str, table: Mapping[str, Any]) -> Pathway:
    """One parsed pathway file, checked. Raises ProfileError naming the node and what is wrong."""
    for key in ("id", "title", "source", "start"):
        if not isinstance(table.get(key), str) or not table[key]:
            raise ProfileError(name, key, "a text is needed")
    raw = table.get("node")
    if not isinstance(raw, dict) or not raw:
        raise ProfileError(name, "node", "tables [node.NAME] are needed")
    nodes = {key: _node(name, key, value) for key, value in raw.items()}
    _check_graph(name, table["start"], nodes)
    return Pathway(table["id"], table["title"], int(table["version"]), table["source"], table["start"], nodes)


def _node(file: str, name: str, row: Any) -> Node:
    def wrong(key: str, message: str) -> ProfileError:
        return ProfileError(file, f"node.{name}.{key}" if key else f"node.{name}", message)

    if not isinstance(row, dict):
        raise wrong("", "a table is needed")
    unknown = sorted(set(row) - _NODE_KEYS)
    if unknown:
        raise wrong(unknown[0], f"this key is not known; known keys are {', '.join(sorted(_NODE_KEYS))}")
    if not isinstance(row.get("source"), str) or not row["source"]:
        raise wrong("source", "every node needs its source")
    seen = bool(row.get("seen", False))
    if "advice" in row:
        return _advice_node(wrong, name, row, seen)
    question, fact = row.get("question"), row.get("fact")
    if not isinstance(question, str) or not question:
        raise wrong("question", "a question or advice is needed")
    if not isinstance(fact, str) or fact not in FACTS:
        raise wrong("fact", f"{fact!r} is not a fact this program knows; known are {', '.join(FACTS)}")
    branches = _branches(wrong, FACTS[fact].kind, FACTS[fact].unit, row)
    not_known = row.get("not_known")
    if not_known is not None and not isinstance(not_known, str):
        raise wrong("not_known", "the name of a node is needed")
    return Node(name, question, fact, branches, not_known, None, "individual", None, row["source"], seen)


def _advice_node(wrong: Any, name: str, row: Mapping[str, Any], seen: bool) -> Node:
    text, kind = row["advice"], row.get("kind")
    if not isinstance(text, str) or not text:
        raise wrong("advice", "a text is needed")
    for words in FORBIDDEN_WORDS:
        if words in text.lower():
            raise wrong("advice", f"{words!r} is a verdict this program does not give; say what is advised")
    if kind not in get_args(AdviceKind):
        raise wrong("kind", f"one of {', '.join(get_args(AdviceKind))} is needed; {kind!r} was given")
    rule = None
    for key, rule_kind in (("flow_l_min", "fixed"), ("flow_plus_l_min", "usual_plus")):
        if key in row:
            if not isinstance(row[key], (int, float)) or not 0.1 <= row[key] <= 4.0:
                raise wrong(key, "a flow from 0.1 to 4 L/min is allowed")
            rule = FlowRule(rule_kind, float(row[key]))  # type: ignore[arg-type]
    return Node(name, "", "", (), None, text, cast(AdviceKind, kind), rule, row["source"], seen)


def _branches(wrong: Any, kind: str, unit: str, row: Mapping[str, Any]) -> tuple[Branch, ...]:
    if kind == "number":
        if not isinstance(row.get("below"), (int, float)):
            raise wrong("below", "a number question needs `below`, `then` and `otherwise`")
        limit = float(row["below"])
        suffix = f" {unit}".rstrip()
        return (
            Branch(_name(wrong, "then", row), f"below {limit:g}{suffix}", below=limit),
            Branch(_name(wrong, "otherwise", row), f"{limit:g}{suffix} or more", at_least=limit),
        )
    if kind == "yes_no":
        return (
            Branch(_name(wrong, "yes", row), "yes", equals=True),
            Branch(_name(wrong, "no", row), "no", equals=False),
        )
    choices = row.get("choices")
    if not isinstance(choices, dict) or not choices:
        raise wrong("choices", "a table of choice = node is needed, and `other`")
    named = [Branch(_name(wrong, key, choices), key, equals=frozenset({key})) for key in choices]
    return (*named, Branch(_name(wrong, "other", row), "another", equals=frozenset()))


def _name(wrong: Any, key: str, row: Mapping[str, Any]) -> str:
    if not isinstance(row.get(key), str):
        raise wrong(key, "the name of a node is needed")
    return str(row[key])


def _check_graph(file: str, start: str, nodes: Mapping[str, Node]) -> None:
    """Every target exists, every node is reached, and no path comes back to itself."""
    finished: set[str] = set()
    open_path: list[str] = []

    def visit(name: str, asked_by: str) -> None:
        if name not in nodes:
            raise ProfileError(file, asked_by, f"it leads to {name!r}, which is not a node of this file")
        if name in open_path:
            raise ProfileError(file, f"node.{name}", f"the path goes in a circle: {' → '.join([*open_path, name])}")
        if name in finished:
            return
        open_path.append(name)
        node = nodes[name]
        for target in [*(branch.to for branch in node.branches), *([node.not_known] if node.not_known else [])]:
            visit(target, f"node.{name}")
        open_path.pop()
        finished.add(name)

    visit(start, "start")
    lost = sorted(set(nodes) - finished)
    if lost:
        raise ProfileError(file, f"node.{lost[0]}", "no path leads to this node")
