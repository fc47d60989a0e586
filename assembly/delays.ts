// delays kernels
