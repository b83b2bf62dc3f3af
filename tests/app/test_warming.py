from gainbench.kernels.reach import reach
from gainbench.kernels.stability_edge import stability_edge
from gainbench_app.warming import warm_up_window


def test_afterwards_the_kernels_of_the_maps_are_compiled():
    warm_up_window()
    assert reach.signatures
    assert stability_edge.signatures
