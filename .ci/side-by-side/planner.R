# Times quadprog (Goldfarb & Idnani) on a planning problem (format: plan/convex/sidebyside_test.go).
# Usage: Rscript planner.R FILE quadprog|quadprog-compact
# One line a repetition: time to build and to solve [s], iterations, objective, largest violation of a limit, limits that bind.
# The diagonal Hessian is given as its factor, so that quadprog need not make one.
suppressMessages(library(quadprog))
arguments <- commandArgs(trailingOnly = TRUE)
f <- file(arguments[1], "rb")
size <- function() { two <- readBin(f, "integer", 2, size = 4, endian = "little"); two[1] }
take <- function(k) readBin(f, "double", k, endian = "little")
n <- size(); m <- size(); curved <- size()
cost <- take(n); upper <- take(n); h <- take(n); limits <- take(m)
a <- matrix(take(n * m), nrow = n) # a column a limit
demand <- take(1)
close(f)
now <- function() c(as.numeric(Sys.time()), sum(proc.time()[1:2]))
# Short times are elapsed ones, since the processor's clock may be coarse; long ones are processor time.
since <- function(a, b) if (b[1] - a[1] < 0.05) b[1] - a[1] else b[2] - a[2]
begin <- now()[1]
k <- 0
slow <- FALSE
while (k <= 25 && (k <= 3 || now()[1] - begin < 1) && !slow) {
	t0 <- now()
	factor <- diag(1 / sqrt(h))
	bound <- c(-limits, demand, rep(0, n), -upper)
	if (arguments[2] == "quadprog") {
		matrix <- cbind(-a, rep(1, n), diag(n), -diag(n))
	} else {
		rows <- m + 1
		matrix <- cbind(-a, rep(1, n), rbind(rep(1, n), matrix(0, n - 1, n)), rbind(rep(-1, n), matrix(0, n - 1, n)))
		index <- cbind(matrix(c(n, 1:n), n + 1, rows), rbind(rep(1, n), 1:n, matrix(0, n - 1, n)), rbind(rep(1, n), 1:n, matrix(0, n - 1, n)))
	}
	t1 <- now()
	s <- if (arguments[2] == "quadprog") solve.QP(factor, -cost, matrix, bound, factorized = TRUE)
	     else solve.QP.compact(factor, -cost, matrix, index, bound, factorized = TRUE)
	t2 <- now()
	slow <- since(t0, t2) > 3 # one run must do
	k <- k + 1
	if (k == 1 && !slow) next # the first warms up
	x <- s$solution
	value <- drop(crossprod(a, x))
	worst <- max(value - limits, demand - sum(x), x - upper, -x, 0)
	cat(sprintf("run %s %.9f %.9f %d %.15g %.3g %d\n", arguments[2], since(t0, t1), since(t1, t2), as.integer(s$iterations[1]),
		sum(cost * x) + sum(h * x * x) / 2, worst, sum(value > limits * (1 - 1e-7))))
}
