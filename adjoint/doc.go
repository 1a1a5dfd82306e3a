// Package adjoint computes how every watched quantity answers to every well: sensitivities, influence fields, capture.
//
// Question answered: which wells drive each receptor, and where does each well's water come from?
//
// With the heads h from A h = b - sum_w Q_w e_w, A symmetric, and a quantity
//
//	J = c'h + d'Q + e
//
// one adjoint solve A z = c gives the derivative with respect to every rate at once (Sykes, Wilson & Andrews 1985, WRR 21(3)):
//
//	dJ/dQ_w = -z[w] + d_w
//
// z is the influence: minus the change of J per unit rate pumped anywhere. One factorisation serves the heads and all quantities;
// solves = distinct quantities + 1, whatever the number of wells.
//
// The change of a receptor is base value - value, so its sensitivity is z[w] - d_w, which is not negative for a level or an outflow on a
// mesh whose matrix is an M-matrix.
//
// Symbols, units, signs: h head [m]; Q rate [m³/d], pumping positive; c weights on heads; d direct terms: a well's own logarithm and linear
// loss in its bore's level [d/m²]; z in the quantity's unit per m³/d. Capture: the change of a feature's flow into the aquifer per unit
// rate [-]; a well's shares sum to 1.
//
// # Discretisation error
//
// Question answered: by how much do a receptor's change and its sensitivities differ from those of the site as it is entered, because the mesh
// has triangles of finite size? It is never uncertainty: the site's parameters are taken as true.
//
// Field.Errors compares with the mesh of which every triangle is cut into four. With s the drawdowns at the rates, z a row's influence, suffixes c and
// f for the coarse and the finer mesh, P linear interpolation from one to the other and a(.,.) the matrix as a bilinear form,
//
//	J_f - J_c = a_f(s_f - P s_c, z_f - P z_c) - (a_f(P s_c, P z_c) - a_c(s_c, z_c)) + rest
//
// The first part is the dual-weighted residual (Becker & Rannacher 2001; Oden & Prudhomme 2001) written as a sum over triangles of one error times
// the other, with the finer mesh as the richer space (Bank & Weiser 1985, Math. Comput. 44); the second is what lumping of leakage, lakes,
// rivers and head-dependent edges at nodes adds, a sum over triangles and line edges; the rest is the difference of the quantity's own weights,
// of direct terms and of control volumes that are not thirds of triangles. Everything that the model is made of is in it, since the
// finer model is assembled from the same site: zone borders, lumping, equivalent radii (their local problems span the same patches) and
// springs' effective conductances. Neither the logarithms at wells nor jumps of the gradient at rivers and zone borders need recovery.
//
// The finer model is never factored. Each field starts from P of the coarse one and is improved by cycles of Gauss-Seidel sweeps there and
// solves with the coarse factor, until a hundredth of the first residual is left, a thousandth where a row reads the level in a bore (two-grid method; Brandt 1977). All changes take two such solves
// together, of the state without pumping and of the drawdown; all slopes one a distinct row, whatever the number of wells, since the row's influence on
// both meshes holds the difference at every well.
//
// Signed estimates: computed less exact value is -4/3 of the difference between the meshes (Richardson 1911), for an error of second order.
// Beside a corner about which heads go as r^a, 0 < a < 1, terms fall by 4^a instead of 4; a is found from the angles, transmissivities and
// conditions about the node (aquifer.Model.Corners), and the terms of six rings of triangles count 1/(1 - 4^-a). For slopes the
// same is done with one solve a corner, which tells how strongly each well's field is bent there.
//
// Bounds: twice the sum of the absolute values of the terms, so that nothing cancels between places. Twice allows for errors that
// fall by no more than half from mesh to mesh. It is a bound of the terms, not a proof: it holds as far as the finer mesh shows what the exact solution
// would, and it has been measured (errors_test.go). Around springs, and around a bore whose own level a row reads, both fields are logarithms
// about one node and the meshes differ there by as much as the equivalent radii do: the patch of the local problem counts as one term. A slope's
// bound takes for each cluster of triangles the product of both fields' norms (Cauchy and Schwarz), the wells' by two sweeps after one
// solve each; the rest and the springs' patches enter in proportion to the slope and to the well's field there.
//
// Where features switch, the set that is off on the finer mesh is that of the interpolated heads, and the comparison is of the two linear problems. The
// largest drawdown beneath a polygon is compared with the largest on the finer mesh.
//
// Refine makes meshes until every change is as accurate as wanted. With an error of g h² per area the least number of nodes for a given
// error has the edge length h in proportion to g^(-1/4); g comes from the terms, summed about each node, of all rows, each
// weighted by its own error over what is wanted. Accuracy is relative to the sum of the wells' absolute contributions, which is the change itself
// where no contribution has the other sign.
//
// Not in it: the row of a spring that has stopped, whose value goes on below zero by a formula with the mesh's own C_eff and so has no
// limit (where it is shown as zero its error is that of the flow without pumping, BaseError); rounding; what snapping, smoothing of input and straight segments of the site's own lines leave out; a spring's
// conductance that was found from a measured flow is taken as found on the coarse mesh.
//
// Sources: Bank RE, Weiser A (1985) Math. Comput. 44(170); Becker R, Rannacher R (2001) Acta Numerica 10; Brandt A (1977) Math. Comput. 31(138);
// Oden JT, Prudhomme S (2001) Comput. Math. Appl. 41; Richardson LF (1911) Phil. Trans. R. Soc. A 210; Strang G, Fix GJ (1973) An
// Analysis of the Finite Element Method, ch. 8.
//
// # Assumptions
//
// Assumes what package aquifer assumes. The largest drawdown beneath a polygon is not linear: its tangent is that of the worst place
// at the rates asked for.
package adjoint
