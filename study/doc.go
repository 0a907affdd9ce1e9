// Package study answers single questions on a case: what a given trip does to frequency, and
// what a recorded event says about a system. It sits above solve and knows no terminal and no
// plots.
package study
