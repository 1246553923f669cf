#include "dissection.hpp"

#include <algorithm>
#include <cmath>
#include <limits>
#include <thread>

namespace {

/** Parts of at most this many nodes are cut no further. */
constexpr int LEAF_NODES = 16;
/** Parts of more nodes than this hand their high side to another thread, on the first cut only. */
constexpr int THREAD_NODES = 10000;

struct Node {
	float at[2];
	int id;
};

struct Dissection {
	Rows rows;
	std::vector<Node> nodes;
	/** Last part in which a node was on the high side; parts are numbered as in a binary heap. */
	std::vector<long long> highOf;
	/** Longest edge along x and y: only nodes this close below a cut can have a neighbour above it. */
	float reach[2] = {0, 0};

	void cut(int begin, int end, long long part);
};

void Dissection::cut(int begin, int end, long long part) {
	if (end - begin <= LEAF_NODES) return;
	float least[2], most[2];
	for (int axis = 0; axis < 2; axis++) {
		least[axis] = std::numeric_limits<float>::infinity();
		most[axis] = -least[axis];
	}
	for (int k = begin; k < end; k++) {
		for (int axis = 0; axis < 2; axis++) {
			least[axis] = std::min(least[axis], nodes[k].at[axis]);
			most[axis] = std::max(most[axis], nodes[k].at[axis]);
		}
	}
	const int axis = most[0] - least[0] >= most[1] - least[1] ? 0 : 1;
	if (most[axis] == least[axis]) return;
	const auto first = nodes.begin() + begin;
	const auto last = nodes.begin() + end;
	const auto middle = first + (end - begin) / 2;
	std::nth_element(first, middle, last, [axis](const Node &a, const Node &b) {
		return a.at[axis] < b.at[axis];
	});
	// All nodes of one coordinate on one side: a straight cut separates with the fewest nodes.
	const float median = middle->at[axis];
	const bool isLow = median < most[axis];
	const auto low = [=](const Node &node) {
		return isLow ? node.at[axis] <= median : node.at[axis] < median;
	};
	const auto high = std::partition(first, last, low);
	float border = least[axis];
	for (auto node = first; node != high; node++) border = std::max(border, node->at[axis]);
	for (auto node = high; node != last; node++) highOf[node->id] = part;
	// Low, high, separator: the separator leaves the low side, and the high side moves down.
	const float nearest = border - reach[axis];
	const auto separator = std::partition(first, high, [&](const Node &node) {
		if (node.at[axis] < nearest) return true;
		for (int p = rows.start[node.id]; p < rows.start[node.id + 1]; p++) {
			if (highOf[rows.column[p]] == part) return false;
		}
		return true;
	});
	std::rotate(separator, high, last);
	const int highBegin = static_cast<int>(separator - nodes.begin());
	const int highEnd = highBegin + static_cast<int>(last - high);
	if (part == 1 && end - begin > THREAD_NODES) {
		// The two sides have no neighbours in each other, so that neither reads what the other writes.
		std::thread other([=, this] { cut(highBegin, highEnd, 3); });
		cut(begin, highBegin, 2);
		other.join();
		return;
	}
	cut(begin, highBegin, 2 * part);
	cut(highBegin, highEnd, 2 * part + 1);
}

} // namespace

std::vector<int> dissect(const System &system) {
	Dissection all;
	all.rows = bothTriangles(system, false);
	all.nodes.resize(system.n);
	all.highOf.assign(system.n, 0);
	for (int i = 0; i < system.n; i++) {
		all.nodes[i] = {{static_cast<float>(system.x[i]), static_cast<float>(system.y[i])}, i};
	}
	for (int i = 0; i < system.n; i++) {
		for (int p = system.start[i]; p < system.start[i + 1]; p++) {
			const Node &other = all.nodes[system.column[p]];
			for (int axis = 0; axis < 2; axis++) {
				const float length = std::abs(all.nodes[i].at[axis] - other.at[axis]);
				all.reach[axis] = std::max(all.reach[axis], length);
			}
		}
	}
	all.cut(0, system.n, 1);
	std::vector<int> order(system.n);
	for (int k = 0; k < system.n; k++) order[k] = all.nodes[k].id;
	return order;
}
