"""Guideline pathways as data: a small decision graph, walked for one person to advice with its reasons.

A pathway is a file in profiles/pathways/. A walk ends in advice, or at the first fact that is missing, which is named;
where a question can be answered "not known", its branch says what to do. No branch declares travel harmless.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from planner.guidance.facts import FACTS, Fact
from planner.guidance.pathway_file import AdviceKind, FlowRule, Node, Pathway, load_pathways

__all__ = ["Advice", "FlowRule", "MissingFact", "Pathway", "PathwayResult", "Step", "load_pathways", "walk"]


@dataclass(frozen=True)
class Step:
    """One turn of the story: the question, the answer, the fact that led there, and where the rule is from."""

    question: str
    answer: str
    fact_text: str
    source: str
    seen: bool


@dataclass(frozen=True)
class Advice:
    """What the pathway advises at its end."""

    text: str
    kind: AdviceKind
    source: str
    seen: bool


@dataclass(frozen=True)
class MissingFact:
    """A fact that the walk needed and nobody entered."""

    name: str
    question: str


@dataclass(frozen=True)
class PathwayResult:
    """A walk: its steps, the advice at its end, or what is missing."""

    pathway_id: str
    title: str
    version: int
    source: str
    steps: tuple[Step, ...]
    advice: Advice | None
    missing: MissingFact | None
    flow_rule: FlowRule | None
    status: Literal["advice", "missing", "not for this person"]

    @property
    def test_advised(self) -> bool:
        """The pathway asks for a test."""
        return self.advice is not None and self.advice.kind in (
            "challenge",
            "challenge_on_oxygen",
            "walk_test",
            "refer",
        )


def walk(pathway: Pathway, facts: Mapping[str, Fact]) -> PathwayResult:
    """Walk the pathway with these facts. Deterministic; visits each node at most once."""
    steps: list[Step] = []
    name = pathway.start
    while True:
        node = pathway.nodes[name]
        if node.advice is not None:
            advice = Advice(node.advice, node.advice_kind, node.source, node.seen)
            status: Literal["advice", "not for this person"] = (
                "not for this person" if node.advice_kind == "not_for" else "advice"
            )
            return _result(pathway, steps, status, advice=advice, flow_rule=node.flow_rule)
        fact = facts[node.fact]
        following, answer = _branch(node, fact)
        if following is None:
            missing = MissingFact(node.fact, FACTS[node.fact].question)
            return _result(pathway, steps, "missing", missing=missing)
        steps.append(Step(node.question, answer, fact.text, node.source, node.seen))
        name = following


def _result(
    pathway: Pathway,
    steps: list[Step],
    status: Literal["advice", "missing", "not for this person"],
    advice: Advice | None = None,
    missing: MissingFact | None = None,
    flow_rule: FlowRule | None = None,
) -> PathwayResult:
    return PathwayResult(
        pathway.id, pathway.title, pathway.version, pathway.source, tuple(steps), advice, missing, flow_rule, status
    )


def _branch(node: Node, fact: Fact) -> tuple[str | None, str]:
    """Where the fact leads and the answer in words; leads nowhere when it is not known and no branch is for that."""
    if fact.value is None:
        return node.not_known, "not known"
    for branch in node.branches:
        if branch.holds(fact.value):
            return branch.to, branch.answer
    raise AssertionError(f"{node.name} has no branch for {fact.value!r}; the loader lets no such node in")
