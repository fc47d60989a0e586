// fits kernels
