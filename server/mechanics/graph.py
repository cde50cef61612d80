"""Pieces and joints as a graph: what hangs together, which joint alone holds two parts, which ring a joint is in.

Pieces are numbered from 0; a joint is a pair of them. Two joints may connect the same pieces.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence

Ends = Sequence[tuple[int, int]]


def neighbours(count: int, ends: Ends) -> list[list[tuple[int, int]]]:
    """For each piece the (piece, joint) pairs that it is joined to."""
    result: list[list[tuple[int, int]]] = [[] for _ in range(count)]
    for joint, (a, b) in enumerate(ends):
        result[a].append((b, joint))
        result[b].append((a, joint))
    return result


def components(count: int, ends: Ends, without: Collection[int] = ()) -> list[list[int]]:
    """Bodies that hang together, each in rising order, leaving some joints out."""
    near = neighbours(count, ends)
    seen = [False] * count
    found = []
    for root in range(count):
        if seen[root]:
            continue
        seen[root] = True
        body = [root]
        for piece in body:  # grows while it is walked
            for other, joint in near[piece]:
                if not seen[other] and joint not in without:
                    seen[other] = True
                    body.append(other)
        found.append(sorted(body))
    return found


def bridges(count: int, ends: Ends) -> dict[int, list[int]]:
    """Joints whose loss parts a body in two, each with the pieces on its far side as seen from the first piece.

    One walk along the graph (R. E. Tarjan, "A note on finding the bridges of a graph", Information Processing
    Letters 2, 1974; from memory), without recursion so that long chains do no harm.
    """
    near = neighbours(count, ends)
    entered = [-1] * count
    lowest = [0] * count
    order: list[int] = []
    found: dict[int, list[int]] = {}
    for root in range(count):
        if entered[root] >= 0:
            continue
        entered[root] = lowest[root] = len(order)
        order.append(root)
        stack = [(root, -1, iter(near[root]))]
        while stack:
            piece, via, rest = stack[-1]
            step = next(rest, None)
            if step is None:
                stack.pop()
                if stack:
                    parent = stack[-1][0]
                    lowest[parent] = min(lowest[parent], lowest[piece])
                    if lowest[piece] == entered[piece]:
                        found[via] = sorted(order[entered[piece] :])
                continue
            other, joint = step
            if joint == via:
                continue
            if entered[other] < 0:
                entered[other] = lowest[other] = len(order)
                order.append(other)
                stack.append((other, joint, iter(near[other])))
            else:
                lowest[piece] = min(lowest[piece], entered[other])
    return found


def ring_through(count: int, ends: Ends, joint: int) -> list[int]:
    """Pieces of the shortest ring that a joint is part of, from its first piece to its second; empty for a bridge."""
    near = neighbours(count, ends)
    start, goal = ends[joint]
    came_from = {start: start}
    queue = [start]
    for piece in queue:  # grows while it is walked
        for other, via in near[piece]:
            if via != joint and other not in came_from:
                came_from[other] = piece
                queue.append(other)
    if goal not in came_from:
        return []
    ring = [goal]
    while ring[-1] != start:
        ring.append(came_from[ring[-1]])
    return ring[::-1]
