from __future__ import annotations

import numpy as np

from xlaxial.solver.connectivity import Loose, diagnose, pieces_of


def test_held_chains_have_no_fault(network):
    held = network([(0, 1), (1, 2), (3, 4)], [(2, 1.0), (3, np.inf)], member=[0, 0, 0, 1, 1])
    assert diagnose(held) == []
    assert pieces_of(held)[0] == 2


def test_member_without_any_support(network):
    ends = [(0, 1), (1, 2), (3, 4)]
    assert diagnose(network(ends, [(0, 1.0)], member=[0, 0, 0, 1, 1])) == [Loose(1, "no support", (3, 4))]


def test_piece_without_support_is_a_mechanism(network):
    # member 0: bar 0-1 is held, the bars 2-3 and 4-5 are not joined to it; member 1 stands
    ends = [(0, 1), (2, 3), (4, 5), (6, 7)]
    found = diagnose(network(ends, [(1, 2.0), (7, np.inf)], member=[0, 0, 0, 0, 0, 0, 1, 1]))
    assert found == [Loose(0, "mechanism", (2, 3)), Loose(0, "mechanism", (4, 5))]


def test_pieces_that_are_all_held_are_told_apart_from_mechanisms(network):
    ends = [(0, 1), (1, 2), (3, 4), (5, 6)]
    found = diagnose(network(ends, [(0, 2.0), (3, np.inf), (5, 1.0)], member=[0, 0, 0, 0, 0, 1, 1]))
    assert found == [Loose(0, "pieces", (3, 4))]


def test_branched_members_in_any_order(network):
    ends = [(5, 2), (0, 2), (2, 4), (1, 3), (3, 1)]
    member = [0, 1, 0, 1, 0, 0]
    assert diagnose(network(ends, [(4, 1.0), (3, 1.0)], member=member)) == []
    assert diagnose(network(ends, [(4, 1.0)], member=member)) == [Loose(1, "no support", (1, 3))]


def test_pieces_that_are_left_when_bars_are_taken_out(network):
    chain = network([(0, 1), (1, 2), (2, 3)], [(0, 1.0)])
    count, piece = pieces_of(chain, np.array([True, False, True]))
    assert count == 2
    np.testing.assert_array_equal(piece, [0, 0, 1, 1])
    mesh = network([(0, 1), (1, 2), (0, 2), (2, 3)], [(0, 1.0)])
    count, piece = pieces_of(mesh, np.array([True, False, True, False]))
    assert count == 2
    assert piece[0] == piece[1] == piece[2] != piece[3]


def test_nothing_at_all(network):
    one_node = network([(0, 1)], [])
    assert diagnose(one_node) == [Loose(0, "no support", (0, 1))]


def test_many_loose_members_are_found_in_one_pass(network):
    n = 3000
    ends = [(2 * i, 2 * i + 1) for i in range(n)]
    found = diagnose(network(ends, [(0, 1.0)], member=np.repeat(np.arange(n), 2)))
    assert len(found) == n - 1
    assert found[-1] == Loose(n - 1, "no support", (2 * n - 2, 2 * n - 1))
