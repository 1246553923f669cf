#pragma once

#include <vector>

#include "system.hpp"

/**
 * Nested dissection by coordinates (A. George, SIAM J. Numer. Anal. 10 (1973) 345), on two threads:
 * each part is cut at the median of the longer side of its bounding box; the nodes of the low side
 * that have a neighbour on the high side come last. Gives the node at each place of the order.
 */
std::vector<int> dissect(const System &system);
