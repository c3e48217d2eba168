// Sharing the length of each segment between the blends at its two ends; internal to construct.
// Lengths in mm.
#pragma once

#include <cstddef>
#include <vector>

namespace kf::construct {

// How much of both its neighbours each joint may use.
//
// `lengths` are the segments'; `wanted[j]` is what the joint after segment j would like to take from segment
// j and from the next one. With `closed`, the last joint joins the last segment to the first; otherwise it
// takes nothing.
//
// Result    shares with shares[j] <= wanted[j] and, on each segment, the shares of its two joints adding up
// to no
//           more than its length. All rise together as fractions of what they want until a segment is full;
//           its joints then stop and the others go on. So no share can be raised without lowering one that is
//           already a smaller fraction (max-min fair), and nothing that a neighbour leaves is wasted.
// Domain    equal sizes; lengths > 0; wanted >= 0.
// Cost      O(n log n).
std::vector<double> fairShares(const std::vector<double>& lengths, const std::vector<double>& wanted,
                               bool closed);

}  // namespace kf::construct
