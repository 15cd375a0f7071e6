// Draws balls, rods and meshes as the painter does: the same projection, light and cut.

struct View {
    eye: vec3<f32>,
    focal: f32,
    right: vec3<f32>,
    width: f32,
    up: vec3<f32>,
    height: f32,
    back: vec3<f32>,
    near: f32,
    cut_normal: vec3<f32>,
    cut_offset: f32,
    light: vec3<f32>,
    ambient: f32,
    thinnest: f32,
    section: f32,
    section_rim: f32,
    ghost_middle: f32,
}

@group(0) @binding(0) var<uniform> view: View;

fn in_clip(seen: vec3<f32>) -> vec4<f32> {
    return vec4(2.0 * view.focal * seen.x / view.width, 2.0 * view.focal * seen.y / view.height, view.near, seen.z);
}

// Across, up and depth in front of the eye.
fn seen(place: vec3<f32>) -> vec3<f32> {
    let offset = place - view.eye;
    return vec3(dot(offset, view.right), dot(offset, view.up), -dot(offset, view.back));
}

fn is_cut(place: vec3<f32>) -> bool {
    return dot(view.cut_normal, place) > view.cut_offset;
}

// Light of a colour, from sRGB (IEC 61966-2-1); its opacity as it is.
fn linear(colour: vec4<f32>) -> vec4<f32> {
    let encoded = colour.rgb;
    let light = select(pow((encoded + 0.055) / 1.055, vec3(2.4)), encoded / 12.92, encoded <= vec3(0.04045));
    return vec4(light, colour.a);
}

// Factor on the linear light of a lit place; the light is fixed to the camera.
fn shade(normal: vec3<f32>) -> f32 {
    let light = view.right * view.light.x + view.up * view.light.y + view.back * view.light.z;
    return view.ambient + (1.0 - view.ambient) * max(dot(normal, light), 0.0);
}

// Premultiplied, as the targets want it.
fn finish(colour: vec4<f32>, light: f32, alpha: f32) -> vec4<f32> {
    return vec4(colour.rgb * light * alpha, alpha);
}

struct BallOut {
    @builtin(position) clip: vec4<f32>,
    @location(0) place: vec3<f32>,
    @location(1) @interpolate(flat) centre: vec3<f32>,
    @location(2) @interpolate(flat) radius: f32,
    @location(3) @interpolate(flat) colour: vec4<f32>,
}

@vertex
fn ball_vertex(
    @builtin(vertex_index) corner: u32,
    @location(0) centre: vec3<f32>,
    @location(1) radius: f32,
    @location(2) colour: vec4<f32>,
) -> BallOut {
    // A square across the line of sight that just holds the outline.
    let towards = centre - view.eye;
    let distance = length(towards);
    let sight = towards / distance;
    let across = normalize(cross(sight, view.up));
    let over = cross(across, sight);
    let half = radius * distance / sqrt(max(distance * distance - radius * radius, 1e-4 * radius * radius));
    let sides = vec2(f32(corner & 1u), f32(corner >> 1u)) * 2.0 - 1.0;
    let place = centre + half * (sides.x * across + sides.y * over);
    return BallOut(in_clip(seen(place)), place, centre, radius, linear(colour));
}

struct Pixel {
    @location(0) colour: vec4<f32>,
    @builtin(frag_depth) depth: f32,
}

// Whether a place of a ball's section lies in the dark rim, which is at least a few samples wide.
fn in_rim(in: BallOut, place: vec3<f32>) -> bool {
    let before = dot(view.cut_normal, in.centre) - view.cut_offset;
    let section = sqrt(max(in.radius * in.radius - before * before, 0.0));
    let width = min(max(0.05 * in.radius, 1.5 * seen(in.centre).z / view.focal), section);
    let offset = place - in.centre;
    return in.radius * in.radius - dot(offset, offset) < 2.0 * section * width;
}

@fragment
fn ball_fragment(in: BallOut) -> Pixel {
    let sight = normalize(in.place - view.eye);
    let from_eye = in.centre - view.eye;
    let along = dot(from_eye, sight);
    let miss = from_eye - along * sight;
    let inside = in.radius * in.radius - dot(miss, miss);
    if inside < 0.0 { discard; }
    let half = sqrt(inside);
    var place = view.eye + (along - half) * sight;
    var normal = (place - in.centre) / in.radius;
    var light = shade(normal);
    if is_cut(place) {
        // What the plane leaves of the ball shows its flat section.
        if is_cut(view.eye + (along + half) * sight) { discard; }
        let to_plane = view.cut_offset - dot(view.cut_normal, view.eye);
        place = view.eye + sight * (to_plane / dot(view.cut_normal, sight));
        normal = view.cut_normal;
        light = view.section * select(1.0, view.section_rim, in_rim(in, place));
    }
    let turned = 1.0 - abs(dot(normal, sight));
    let ghost = in.colour.a * mix(view.ghost_middle, 1.0, turned * turned);
    let alpha = select(ghost, 1.0, in.colour.a >= 1.0);
    return Pixel(finish(in.colour, light, alpha), view.near / seen(place).z);
}

struct RodOut {
    @builtin(position) clip: vec4<f32>,
    @location(0) place: vec3<f32>,
    @location(1) colour: vec4<f32>,
}

@vertex
fn rod_vertex(
    @builtin(vertex_index) corner: u32,
    @location(0) from_place: vec3<f32>,
    @location(1) to_place: vec3<f32>,
    @location(2) radius: f32,
    @location(3) from_colour: vec4<f32>,
    @location(4) to_colour: vec4<f32>,
) -> RodOut {
    let at_end = (corner & 1u) == 1u;
    let place = select(from_place, to_place, at_end);
    let side = normalize(cross(to_place - from_place, place - view.eye));
    let depth = max(seen(place).z, view.near);
    let half = max(radius, 0.5 * view.thinnest * depth / view.focal);
    let shifted = place + side * half * (f32(corner >> 1u) * 2.0 - 1.0);
    return RodOut(in_clip(seen(shifted)), place, linear(select(from_colour, to_colour, at_end)));
}

@fragment
fn rod_fragment(in: RodOut) -> @location(0) vec4<f32> {
    if is_cut(in.place) { discard; }
    return finish(in.colour, 1.0, in.colour.a);
}

struct MeshOut {
    @builtin(position) clip: vec4<f32>,
    @location(0) place: vec3<f32>,
    @location(1) normal: vec3<f32>,
    @location(2) colour: vec4<f32>,
    @location(3) @interpolate(flat) kind: u32,
}

const LIT: u32 = 1u;
const CUT: u32 = 2u;

@vertex
fn mesh_vertex(
    @location(0) place: vec3<f32>,
    @location(1) normal: vec3<f32>,
    @location(2) colour: vec4<f32>,
    @location(3) kind: u32,
) -> MeshOut {
    return MeshOut(in_clip(seen(place)), place, normal, linear(colour), kind);
}

@fragment
fn mesh_fragment(in: MeshOut) -> @location(0) vec4<f32> {
    // A section that lies in the plane stays.
    let before = dot(view.cut_normal, in.place) - view.cut_offset;
    if (in.kind & CUT) != 0u && before > 0.1 * view.near { discard; }
    if (in.kind & LIT) == 0u { return finish(in.colour, 1.0, in.colour.a); }
    let normal = normalize(in.normal);
    let facing = select(1.0, -1.0, dot(normal, in.place - view.eye) > 0.0);
    return finish(in.colour, shade(facing * normal), in.colour.a);
}
