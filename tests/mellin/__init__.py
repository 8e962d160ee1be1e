"""An independent solution of the evolution equations in Mellin space.

The outside reference of the tests: numpy and scipy only, sharing with the product
nothing but the definition of the kernels as functions of z.
"""
