// Package rules holds tests that keep the rules of this repository; it has no code.
package rules
