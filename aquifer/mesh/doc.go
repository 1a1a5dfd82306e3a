// Package mesh makes a quality conforming Delaunay triangulation of an outline with holes, lines and points.
//
// Question answered: which nodes and triangles carry a flow model of this domain, so that every line of the site is made of
// mesh edges, every well is a node, the box method's matrix is an M-matrix, and the mesh is fine where the head bends most?
//
// Size field. The wanted edge length at x is h(x) = min(coarsest, min over sources of size_s + growth dist(x, s)); sources are
// the points, the lines and the input segments themselves (a segment's own length, so that a short input edge refines its
// surroundings gradually). With Options.Nodes the coarsest size is calibrated so that the integral of 2/(sqrt(3) h²) over the
// domain is the number of nodes wanted.
//
// Method. Vertices are brought together within the tolerance, crossing lines are cut at their intersections, and the pieces
// become the segments of a constrained Delaunay triangulation made incrementally (Bowyer 1981 and Lawson 1977 flips, points in
// the order of a Hilbert curve, walking location). Outside and holes are removed by flood fill. Then encroached segments and
// triangles that are too large or have too small an angle are refined (Ruppert 1995; Shewchuk 2002; off-centres after Ungor
// 2004; concentric shells at sharp corners). Orientation and in-circle tests are exact: a floating-point filter with a proven
// error bound, and exact arithmetic where it is undecided (Shewchuk 1997).
//
// Symbols, units, signs: all lengths, sizes and coordinates in metres; triangles counter-clockwise; neighbour k lies opposite
// vertex k; outline edges have the domain on their left.
//
// Assumptions: a plane of true metres; straight segments. A point or line part outside the domain is not meshed: a line is
// clipped and noted, a point is an error. Nothing is repaired without a Note.
//
// Sources: Ruppert J (1995) J. Algorithms 18(3); Shewchuk JR (1997) Discrete Comput. Geom. 18(3); Shewchuk JR (2002) Comput.
// Geom. 22(1-3); Ungor A (2004) LATIN 2004; Lawson CL (1977) Mathematical Software III; Bowyer A (1981) Comput. J. 24(2); Bank
// RE, Rose DJ (1987) SIAM J. Numer. Anal. 24(4).
package mesh
