// Package study is what the commands do, as functions: a loop goes in, a result struct comes out.
package study
