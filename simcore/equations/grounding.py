"""Which nodes count as 0 V: the references, and one node of each part of the circuit that nothing ties to them.

Opening an element may cut a part off. Its voltages to one another are still defined, and no current flows into the node
that is grounded, so this changes nothing that can be measured.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence

from simcore.components.frame import Frame


def grounded(frame: Frame, references: Sequence[str]) -> list[Hashable]:
    """The references and the first node of each part without one. Nodes are names; other unknowns tie nothing."""
    leader: dict[Hashable, Hashable] = {}

    def find(node: Hashable) -> Hashable:
        while leader[node] != node:
            leader[node] = leader[leader[node]]
            node = leader[node]
        return node

    for branch in frame.branches:
        nodes = [unknown for unknown, _ in branch.weights if isinstance(unknown, str)]
        for node in nodes:
            leader.setdefault(node, node)
        for node in nodes[1:]:
            leader[find(node)] = find(nodes[0])
    tied = {find(reference) for reference in references if reference in leader}
    result: list[Hashable] = [reference for reference in references if reference in leader]
    for node in leader:
        if find(node) not in tied:
            tied.add(find(node))
            result.append(node)
    return result
