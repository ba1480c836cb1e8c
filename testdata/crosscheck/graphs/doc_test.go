// Package graphs holds package decompose/exact against outside solvers.
//
//   - gonum.org/v1/gonum v0.17.0, graph/topo: connected components, and with them whether two masks do (a component is
//     two-colourable exactly when its double cover falls in two, after König 1936);
//   - github.com/crillab/gophersat v1.4.0, maxsat: the optimum of small problems as weighted MaxSAT;
//   - HiGHS through scipy.optimize.milp (python3-scipy 1.10.1 of Debian 12, in milp.py): the optimum of medium ones as an
//     integer programme.
package graphs
