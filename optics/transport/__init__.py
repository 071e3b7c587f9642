"""What a recycling, diffusion or device model takes over: guided modes, kernels in the plane and over the depth."""
