"""All surfaces of a feed as one conforming mesh of the half y >= 0, the can first.

Depends on: fields.geometry, fields.mesh, fields.plan, fields.surface_can, fields.surface_loop.
"""

from __future__ import annotations

from fabgen.fields.geometry import FeedGeometry, check_geometry
from fabgen.fields.mesh import Mesh, merged
from fabgen.fields.plan import MeshPlan
from fabgen.fields.surface_can import can_surface, floor_patch
from fabgen.fields.surface_loop import loop_surface


def feed_mesh(feed: FeedGeometry, plan: MeshPlan) -> tuple[Mesh, int]:
    """Mesh of the half feed and how many triangles, from the first, belong to the can that is kept.

    Raises GeometryError where sizes clash.
    """
    check_geometry(feed)
    can = can_surface(feed.can, plan)
    loop = loop_surface(feed.loop, plan.loop)
    patch = floor_patch(plan.frame, loop.foot_m)
    kept = sum(len(m.triangles) for m in can)
    return merged([*can, patch, *loop.meshes], 1e-4 * plan.edge_m), kept
