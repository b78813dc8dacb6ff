"""Shapes of bodies: outlines in a plane, outlines revolved or extruded, triangle meshes."""
