// fourier kernels
