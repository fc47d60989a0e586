// divergence kernels
