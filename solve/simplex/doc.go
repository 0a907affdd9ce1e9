// Package simplex solves the linear programs that the hour's optimiser meets: few
// coupling rows, and many small sets of which each picks a convex combination of its
// group's columns:
//
//	minimise    Σ cost·x
//	subject to  Σ a_i·x − surplus_i = rhs_i   for every row i, surplus_i ≥ 0
//	            Σ_{j in set} x_j = 1          for every set
//	            x ≥ 0
//
// A bounded dual simplex with generalised upper bounds (Dantzig and Van Slyke, 1967;
// form from memory): every set keeps one key column in the basis, so that the matrix to
// invert has only as many rows as couple the sets, however many sets there are. A
// column is three numbers (p, e, r) and each row prices them alike for all columns of a
// group, so that pricing costs three multiplications a column however many rows there
// are.
//
// Starting from the surplus basis with every set on its cheapest column is dual
// feasible whenever surplus costs are ≥ 0. Rows may be added, and columns barred, at any
// time without losing that.
package simplex
