// Package convex solves the optimisation problems of a pumping plan: linear programmes with few, dense rows.
package convex
