"""The engine: numeric kernels over arrays, which know no file, no material and no unit but nm and radians."""
