// Package mesh makes a quality conforming Delaunay triangulation of an outline with holes, lines and points.
//
// Question answered: which nodes and triangles carry a flow model of this domain, so that every line of the site is made of
// mesh edges, every well is a node, the box method's matrix is an M-matrix, and the mesh is fine where the head bends most?
//
// Size field. The wanted edge length at x is h(x) = min(coarsest, min over sources of size_s + growth dist(x, s)). Sources are
// the vertices that are there once the segments have been cut so that none is encroached and none is longer than four widths of
// the gap beside it: each asks for its shortest edge, or for what the site's point or line asks for if that is less. So a short
// input edge, a narrow gap or a close pair of wells refines its surroundings gradually. With Options.Nodes the coarsest size is
// calibrated so that the integral of 2/(sqrt(3) h²) over the domain gives the number of nodes wanted; when growth alone asks for
// more nodes, it gets them.
//
// Method. Vertices are brought together within the tolerance, crossing lines are cut at their intersections, and the pieces
// become the segments of a constrained Delaunay triangulation (cavities after Bowyer 1981, flips after Lawson 1977 and Sloan
// 1993, points in the order of a Hilbert curve). A triangle is inside when the way to it crosses an odd number of ring segments.
// Segments are cut while encroached, on common shells at sharp corners (Ruppert 1995; Miller, Pav & Walkington 2003), and
// triangles that are too large or too thin get a vertex: an off-centre over an edge bounded by finished triangles or a segment
// (Ungor 2004; Engwirda & Ivers 2016), else the circumcentre (Shewchuk 2002). Smoothing towards an optimal Delaunay triangulation
// follows (Chen & Holst 2011), with flips after each pass, then refinement once more. Orientation and in-circle tests
// are exact: a floating-point filter with a proven error bound, and expansions where it is undecided (Shewchuk 1997). They work
// on the given coordinates themselves; differences keep full precision under any offset, so nothing is shifted.
//
// Where the size grows gently enough and there are many more nodes than vertices of the input, the mesh is made two or four times too
// coarse first, but never coarser than the features of the input allow, and its edges are then cut in the middle where they are too
// long (regular refinement: Bank, Sherman & Weiser 1983), once or twice. Angles stay, nearly all new vertices have six triangles, and
// most of the work is plain. Halving, smoothing, in-circle tests of whole meshes and counting go on in shares of fixed size on all
// processors; flips and insertions are made one after the other, so the mesh does not depend on the number of processors.
//
// With a metric, in-circle tests, centres, angles and encroachment of a region are those of the plane mapped by the square root
// of T^-1 (area kept); orientation is tested in the plane too. Edges on lines are never flipped.
//
// Symbols, units, signs: all lengths, sizes and coordinates in metres; triangles counter-clockwise; neighbour k lies opposite
// vertex k; outline edges have the domain on their left.
//
// Assumptions and what is not done: a plane of true metres; straight segments. A line part outside the domain is dropped and
// noted, a point there is an error. Nothing is repaired without a Note. The angle cannot hold where two segments meet at less,
// nor, with metrics, at corners where regions of different metrics ask for pieces of different length for ever; such triangles
// are counted apart. A gap between lines of many tolerances' width is meshed however long it is, until the budget is hit: a
// larger tolerance closes it.
//
// Sources: Bank RE, Sherman AH, Weiser A (1983) Scientific Computing, IMACS; Bowyer A (1981) Comput. J. 24(2); Chen L, Holst M
// (2011) Comput. Methods Appl. Mech. Eng. 200; Engwirda D, Ivers D (2016) Comput.-Aided Des. 72; Lawson CL (1977) Mathematical
// Software III; Miller GL, Pav SE, Walkington NJ (2003) 12th Int. Meshing Roundtable; Ruppert J (1995) J. Algorithms 18(3);
// Shewchuk JR (1997) Discrete Comput. Geom. 18(3); Shewchuk JR (2002) Comput. Geom. 22(1-3); Sloan SW (1993) Comput. Struct.
// 47(3); Ungor A (2004) LATIN 2004.
package mesh
