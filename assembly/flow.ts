// flow kernels
