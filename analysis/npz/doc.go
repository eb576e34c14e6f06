// Package npz reads and writes numpy's archives of named arrays.
//
// An archive is a zip file; member "name.npy" holds the array "name": the
// bytes \x93NUMPY, a version, the length of a header, the header (a Python
// dictionary literal with the keys descr, fortran_order and shape, padded with
// spaces to a multiple of 64 bytes and closed by a line feed) and then the
// elements. The source is numpy's format note NEP 1, "A simple file format for
// NumPy arrays", with versions 2.0 and 3.0 as numpy.lib.format documents them.
//
// Files come from strangers, so the reader believes nothing: what a header
// claims is compared with the bytes that are there before memory is asked for,
// no pickle is ever opened, and no name is ever used as a path. It decodes by
// itself instead of through a general library, because each of these refusals
// has to come before the decoding.
package npz
