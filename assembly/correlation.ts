// correlation kernels
