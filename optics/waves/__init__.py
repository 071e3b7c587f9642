"""Kernels on arrays: layered media, dipoles in a film, plates, and the quadrature that joins them.

Conventions, stated once. Time runs as exp(-i w t); an index is n + i k with k >= 0 for an absorber.
Wave numbers are in units of the vacuum wave number k0, so that the in-plane wave number ``q`` of light in a
medium of index N never exceeds N, and a layer of thickness d enters as its phase thickness k0 d.
Arrays run over (row, node): a row is one wavelength on one piece of an integration path, a node is one
value of ``q``. Where the polarisation is an axis of its own it leads, s first, then p.
"""
