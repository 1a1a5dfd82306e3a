// CGAL's side of the comparison of mesh generators: Delaunay refinement by Mesh_2 with a size field and an angle bound.
//
//     mesh FILE SCALE DEGREES RUNS
//
// prints nodes, median seconds, seconds of processor, smallest angle in degrees, per cent of obtuse triangles and peak memory in MB. A triangle is too large when its longest edge
// exceeds SCALE times the size wanted at its centroid. The time is that of inserting outline and points and refining; nothing is copied out.
#include <CGAL/Exact_predicates_inexact_constructions_kernel.h>
#include <CGAL/Constrained_Delaunay_triangulation_2.h>
#include <CGAL/Delaunay_mesh_face_base_2.h>
#include <CGAL/Delaunay_mesh_vertex_base_2.h>
#include <CGAL/Delaunay_mesh_size_criteria_2.h>
#include <CGAL/Delaunay_mesher_2.h>
#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdio>
#include <cstdlib>
#include <fstream>
#include <string>
#include <sys/resource.h>
#include <vector>

using K = CGAL::Exact_predicates_inexact_constructions_kernel;
using Vb = CGAL::Delaunay_mesh_vertex_base_2<K>;
using Fb = CGAL::Delaunay_mesh_face_base_2<K>;
using Tds = CGAL::Triangulation_data_structure_2<Vb, Fb>;
using CDT = CGAL::Constrained_Delaunay_triangulation_2<K, Tds>;
using Point = K::Point_2;

// Field is the size wanted: finest (1 + (ratio-1) min(1, distance of the nearest point / reach)). A grid holds in each cell the points that can be nearest.
struct Field {
    std::vector<Point> at;
    double finest, ratio, reach, x0, y0, cell;
    int nx, ny;
    std::vector<std::vector<int>> lists;

    void prepare(double xmin, double ymin, double xmax, double ymax) {
        cell = reach / 4;
        x0 = xmin, y0 = ymin;
        nx = int((xmax - xmin) / cell) + 1;
        ny = int((ymax - ymin) / cell) + 1;
        lists.resize(size_t(nx) * ny);
        double half = cell * std::sqrt(0.5);
        for (int j = 0; j < ny; j++)
            for (int i = 0; i < nx; i++) {
                double cx = x0 + (i + 0.5) * cell, cy = y0 + (j + 0.5) * cell, least = reach * reach;
                auto square = [&](const Point& p) { return (p.x() - cx) * (p.x() - cx) + (p.y() - cy) * (p.y() - cy); };
                for (auto& p : at) least = std::min(least, square(p));
                double within = std::sqrt(least) + 2 * half;
                for (size_t k = 0; k < at.size(); k++)
                    if (square(at[k]) <= within * within) lists[size_t(j) * nx + i].push_back(int(k));
            }
    }
    double size(double x, double y) const {
        int i = std::clamp(int((x - x0) / cell), 0, nx - 1), j = std::clamp(int((y - y0) / cell), 0, ny - 1);
        double d2 = reach * reach;
        for (int k : lists[size_t(j) * nx + i]) {
            double dx = at[k].x() - x, dy = at[k].y() - y;
            d2 = std::min(d2, dx * dx + dy * dy);
        }
        return finest * (1 + (ratio - 1) * std::sqrt(d2) / reach);
    }
};

// Criteria are CGAL's own for size and shape with the size bound taken from the field.
class Criteria : public CGAL::Delaunay_mesh_criteria_2<CDT> {
    using Base = CGAL::Delaunay_mesh_criteria_2<CDT>;
    const Field* field;
    double scale;

public:
    using Quality = CGAL::Delaunay_mesh_size_criteria_2<CDT>::Quality;
    Criteria(double bound, const Field* f, double s) : Base(bound), field(f), scale(s) {}

    class Is_bad : public Base::Is_bad {
        const Field* field;
        double scale2;

    public:
        using Point_2 = Base::Is_bad::Point_2;
        Is_bad(double bound, const Field* f, double s, const K& k) : Base::Is_bad(bound, k), field(f), scale2(s * s) {}
        CGAL::Mesh_2::Face_badness operator()(const Quality q) const {
            if (q.size() > 1) return CGAL::Mesh_2::IMPERATIVELY_BAD;
            return q.sine() < this->B ? CGAL::Mesh_2::BAD : CGAL::Mesh_2::NOT_BAD;
        }
        CGAL::Mesh_2::Face_badness operator()(const CDT::Face_handle& f, Quality& q) const {
            const Point &a = f->vertex(0)->point(), &b = f->vertex(1)->point(), &c = f->vertex(2)->point();
            auto square = [](const Point& p, const Point& r) {
                double x = p.x() - r.x(), y = p.y() - r.y();
                return x * x + y * y;
            };
            double la = square(b, c), lb = square(c, a), lc = square(a, b);
            double longest = std::max(la, std::max(lb, lc)), least = std::min(la, std::min(lb, lc));
            double second = la + lb + lc - longest - least;
            double h = field->size((a.x() + b.x() + c.x()) / 3, (a.y() + b.y() + c.y()) / 3);
            q.second = longest / (scale2 * h * h);
            if (q.size() > 1) {
                q.first = 1;
                return CGAL::Mesh_2::IMPERATIVELY_BAD;
            }
            double area = (b.x() - a.x()) * (c.y() - a.y()) - (b.y() - a.y()) * (c.x() - a.x());
            q.first = area * area / (longest * second); // squared sine of the smallest angle
            return q.sine() < this->B ? CGAL::Mesh_2::BAD : CGAL::Mesh_2::NOT_BAD;
        }
    };
    Is_bad is_bad_object() const { return Is_bad(this->bound(), field, scale, this->traits); }
};

// processor is what this process has used of all processors [s].
static double processor() {
    rusage u;
    getrusage(RUSAGE_SELF, &u);
    return double(u.ru_utime.tv_sec + u.ru_stime.tv_sec) + 1e-6 * double(u.ru_utime.tv_usec + u.ru_stime.tv_usec);
}

int main(int argc, char** argv) {
    if (argc != 5) return std::fprintf(stderr, "usage: mesh FILE SCALE DEGREES RUNS\n"), 2;
    std::ifstream in(argv[1]);
    double scale = std::atof(argv[2]), degrees = std::atof(argv[3]), sine = std::sin(degrees * M_PI / 180);
    int runs = std::atoi(argv[4]);
    int n, m;
    Field field;
    in >> n >> m >> field.finest >> field.ratio >> field.reach;
    std::vector<Point> outline;
    double xmin = 1e300, ymin = 1e300, xmax = -1e300, ymax = -1e300;
    for (int i = 0; i < n + m; i++) {
        double x, y;
        in >> x >> y;
        (i < n ? outline : field.at).push_back(Point(x, y));
        xmin = std::min(xmin, x), xmax = std::max(xmax, x), ymin = std::min(ymin, y), ymax = std::max(ymax, y);
    }
    std::vector<double> seconds, busy;
    size_t nodes = 0;
    double least = 180, obtuse = 0;
    for (int r = 0; r < runs; r++) {
        auto begin = std::chrono::steady_clock::now();
        double before = processor();
        Field f = field;
        f.prepare(xmin, ymin, xmax, ymax);
        CDT cdt;
        for (int i = 0; i < n; i++) cdt.insert_constraint(outline[i], outline[(i + 1) % n]);
        cdt.insert(f.at.begin(), f.at.end());
        CGAL::Delaunay_mesher_2<CDT, Criteria> mesher(cdt, Criteria(sine * sine, &f, scale));
        mesher.refine_mesh();
        seconds.push_back(std::chrono::duration<double>(std::chrono::steady_clock::now() - begin).count());
        busy.push_back(processor() - before);
        nodes = cdt.number_of_vertices();
        if (r + 1 < runs) continue;
        size_t wide = 0, inside = 0;
        for (auto t = cdt.finite_faces_begin(); t != cdt.finite_faces_end(); ++t) {
            if (!t->is_in_domain()) continue;
            inside++;
            bool w = false;
            for (int k = 0; k < 3; k++) {
                const Point &a = t->vertex(k)->point(), &b = t->vertex((k + 1) % 3)->point(), &c = t->vertex((k + 2) % 3)->point();
                double ux = b.x() - a.x(), uy = b.y() - a.y(), vx = c.x() - a.x(), vy = c.y() - a.y(), dot = ux * vx + uy * vy;
                least = std::min(least, std::abs(std::atan2(ux * vy - uy * vx, dot)) * 180 / M_PI);
                w |= dot < -1e-9 * std::hypot(ux, uy) * std::hypot(vx, vy); // rounding of a right angle
            }
            wide += w;
        }
        obtuse = 100.0 * double(wide) / double(inside);
    }
    std::sort(seconds.begin(), seconds.end());
    std::sort(busy.begin(), busy.end());
    long peak = 0;
    std::ifstream status("/proc/self/status");
    for (std::string word; status >> word;)
        if (word == "VmHWM:") status >> peak;
    std::printf("%zu %.4f %.4f %.2f %.3f %ld\n", nodes, seconds[seconds.size() / 2], busy[busy.size() / 2], least, obtuse, peak / 1024);
}
