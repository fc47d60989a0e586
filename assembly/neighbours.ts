// neighbours kernels
