"""Rows in an order in which few relays change: a shortest path over Hamming distances.

The path begins with every relay released and may end anywhere.  Routing by OR-tools: the cheapest
next row first, then local search until nothing near is shorter.  That is no proof of the least.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

__all__ = ["moves_of", "ordered"]


def moves_of(rows: Sequence[int]) -> int:
    """How many relays change in all, beginning with every relay released."""
    return sum((one ^ two).bit_count() for one, two in pairwise([0, *rows]))


def ordered(rows: Sequence[int]) -> list[int]:
    """The rows (each once) in a good order."""
    if len(rows) < 2:
        return list(rows)
    from ortools.constraint_solver import pywrapcp, routing_enums_pb2

    stops = [0, *sorted(rows)]  # place 0 is the start; the end is a place of no cost
    end = len(stops)
    manager = pywrapcp.RoutingIndexManager(end + 1, 1, [0], [end])
    routing = pywrapcp.RoutingModel(manager)

    def distance(start: int, stop: int) -> int:
        one, two = manager.IndexToNode(start), manager.IndexToNode(stop)
        return 0 if end in (one, two) else (stops[one] ^ stops[two]).bit_count()

    routing.SetArcCostEvaluatorOfAllVehicles(routing.RegisterTransitCallback(distance))
    search = pywrapcp.DefaultRoutingSearchParameters()
    search.first_solution_strategy = routing_enums_pb2.FirstSolutionStrategy.PATH_CHEAPEST_ARC
    search.local_search_metaheuristic = routing_enums_pb2.LocalSearchMetaheuristic.GREEDY_DESCENT
    solution = routing.SolveWithParameters(search)
    found = []
    place = routing.Start(0)
    while not routing.IsEnd(place):
        place = solution.Value(routing.NextVar(place))
        if not routing.IsEnd(place):
            found.append(stops[manager.IndexToNode(place)])
    return min((found, sorted(rows)), key=moves_of)
