"""From a JPL kernel to positions: kernels, time scales, frames and the tracks everything else reads."""
