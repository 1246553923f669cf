#include "system.hpp"

#include <sys/resource.h>

#include <charconv>
#include <chrono>
#include <cmath>
#include <fstream>
#include <sstream>
#include <stdexcept>

namespace {

/** The numbers of a Matrix Market file, one after the other (NISTIR 5935, 1996). */
class Numbers {
  public:
	explicit Numbers(const std::string &path) : path_(path) {
		std::ifstream file(path, std::ios::binary);
		if (!file) throw std::runtime_error(path + ": cannot be read");
		std::ostringstream content;
		content << file.rdbuf();
		text_ = std::move(content).str();
		at_ = text_.data();
		end_ = at_ + text_.size();
		if (text_.rfind("%%MatrixMarket", 0) != 0) {
			throw std::runtime_error(path + ": no Matrix Market header");
		}
		while (at_ < end_ && *at_ == '%') {
			while (at_ < end_ && *at_ != '\n') at_++;
			if (at_ < end_) at_++;
		}
	}

	template <typename T> T next() {
		while (at_ < end_ && (*at_ == ' ' || *at_ == '\n' || *at_ == '\r' || *at_ == '\t')) at_++;
		T number{};
		const auto [rest, error] = std::from_chars(at_, end_, number);
		if (error != std::errc{}) {
			throw std::runtime_error(path_ + ": no number at byte " +
			                         std::to_string(at_ - text_.data()));
		}
		at_ = rest;
		return number;
	}

	const std::string &path() const { return path_; }

  private:
	std::string path_;
	std::string text_;
	const char *at_ = nullptr;
	const char *end_ = nullptr;
};

void readColumn(Numbers &numbers, std::vector<double> &values) {
	for (double &value : values) value = numbers.next<double>();
}

/** Reads the sizes of a dense array and refuses others than the wanted ones. */
void expectSizes(Numbers &numbers, int rows, int columns) {
	if (numbers.next<int>() != rows || numbers.next<int>() != columns) {
		throw std::runtime_error(numbers.path() + ": expected " + std::to_string(rows) +
		                         " rows and columns to the number of " + std::to_string(columns));
	}
}

} // namespace

System readSystem(const std::string &matrix, const std::string &rhs, const std::string &coords) {
	System system;
	Numbers entries(matrix);
	const int n = system.n = entries.next<int>();
	entries.next<int>();
	const int count = entries.next<int>();
	system.start.assign(n + 1, 0);
	system.column.resize(count);
	system.value.resize(count);
	int row = 0;
	for (int e = 0; e < count; e++) {
		const int i = entries.next<int>() - 1;
		const int j = entries.next<int>() - 1;
		const bool isNewRow = i == row + 1 && e > 0;
		const bool isNext = isNewRow || (i == row && (e == 0 || j > system.column[e - 1]));
		if (!isNext || i >= n || j < 0 || j > i) {
			throw std::runtime_error(matrix + ": entry " + std::to_string(e + 1) +
			                         " (expected the lower triangle row by row, as the bench writes it)");
		}
		if (isNewRow) system.start[++row] = e;
		system.column[e] = j;
		system.value[e] = entries.next<double>();
	}
	system.start[n] = count;
	for (int i = 0; i < n; i++) {
		if (row != n - 1 || system.column[system.start[i + 1] - 1] != i) {
			throw std::runtime_error(matrix + ": row " + std::to_string(i + 1) + " has no diagonal");
		}
	}
	Numbers right(rhs);
	expectSizes(right, n, 1);
	system.b.resize(n);
	readColumn(right, system.b);
	Numbers places(coords);
	expectSizes(places, n, 2);
	system.x.resize(n);
	system.y.resize(n);
	readColumn(places, system.x);
	readColumn(places, system.y);
	return system;
}

Rows bothTriangles(const System &system, bool hasValues) {
	const int n = system.n;
	Rows rows;
	rows.start.assign(n + 1, 0);
	for (int i = 0; i < n; i++) {
		for (int p = system.start[i]; p < system.start[i + 1]; p++) {
			rows.start[i + 1]++;
			if (system.column[p] != i) rows.start[system.column[p] + 1]++;
		}
	}
	for (int i = 0; i < n; i++) rows.start[i + 1] += rows.start[i];
	rows.column.resize(rows.start[n]);
	if (hasValues) rows.value.resize(rows.start[n]);
	std::vector<int> next(rows.start.begin(), rows.start.end() - 1);
	const auto put = [&](int i, int j, double value) {
		if (hasValues) rows.value[next[i]] = value;
		rows.column[next[i]++] = j;
	};
	for (int i = 0; i < n; i++) {
		for (int p = system.start[i]; p < system.start[i + 1]; p++) {
			const int j = system.column[p];
			put(i, j, system.value[p]);
			if (j != i) put(j, i, system.value[p]);
		}
	}
	return rows;
}

double residualOf(const System &system, const double *solution, std::vector<double> &r) {
	r = system.b;
	double normB = 0;
	for (const double value : system.b) normB += value * value;
	for (int i = 0; i < system.n; i++) {
		double sum = 0;
		for (int p = system.start[i]; p < system.start[i + 1]; p++) {
			const int j = system.column[p];
			sum += system.value[p] * solution[j];
			if (j != i) r[j] -= system.value[p] * solution[i];
		}
		r[i] -= sum;
	}
	double normR = 0;
	for (const double value : r) normR += value * value;
	return std::sqrt(normR / normB);
}

double now() {
	const auto time = std::chrono::steady_clock::now().time_since_epoch();
	return std::chrono::duration<double>(time).count();
}

double peakMb() {
	rusage usage{};
	getrusage(RUSAGE_SELF, &usage);
	return static_cast<double>(usage.ru_maxrss) / 1024;
}
