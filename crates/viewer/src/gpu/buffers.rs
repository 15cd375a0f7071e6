use super::pass::Pipelines;
use super::{Shown, bytes};
use bedswell_painter::{Ball, Camera, Drawing, Mesh, Rod};
use bevy::prelude::*;
use bevy::render::render_resource::{
    BindGroup, BindGroupEntries, Buffer, BufferInitDescriptor, BufferUsages, PipelineCache,
};
use bevy::render::renderer::RenderDevice;
use std::sync::Arc;

/// A drawing on the graphics card.
#[derive(Resource)]
pub(super) struct SceneBuffers {
    /// Camera, cut and light.
    pub(super) view: BindGroup,
    /// Opaque balls, rods and meshes.
    pub(super) solid: [Option<Batch>; 3],
    /// See-through balls from far to near, rods and meshes.
    pub(super) clear: [Option<Batch>; 3],
    drawing: Arc<Drawing>,
    camera: Camera,
}

/// What one call draws.
pub(super) struct Batch {
    /// Instances, or the points of meshes.
    pub(super) data: Buffer,
    /// The points of the meshes' triangles.
    pub(super) triangles: Option<Buffer>,
    /// How many instances, or points of triangles.
    pub(super) count: u32,
}

/// Brings what is shown onto the graphics card, and only what changed.
pub(super) fn upload(
    shown: Option<Res<Shown>>,
    old: Option<ResMut<SceneBuffers>>,
    pipelines: Res<Pipelines>,
    cache: Res<PipelineCache>,
    device: Res<RenderDevice>,
    mut commands: Commands,
) {
    let Some(shown) = shown else { return };
    let view = || {
        let bytes = bytes::view(&shown.drawing, &shown.camera, shown.thinnest);
        let buffer = store(&device, &bytes, BufferUsages::UNIFORM);
        device.create_bind_group(
            "view of the bed",
            &cache.get_bind_group_layout(&pipelines.view),
            &BindGroupEntries::single(buffer.as_entire_binding()),
        )
    };
    match old {
        Some(old) if Arc::ptr_eq(&old.drawing, &shown.drawing) && old.camera == shown.camera => {}
        Some(mut old) if Arc::ptr_eq(&old.drawing, &shown.drawing) => {
            old.view = view();
            old.camera = shown.camera;
            if old.clear[0].is_some() {
                old.clear[0] = ghosts(&device, &shown.drawing, &shown.camera);
            }
        }
        _ => commands.insert_resource(SceneBuffers {
            view: view(),
            solid: batches(&device, &shown.drawing, true),
            clear: {
                let [_, rods, meshes] = batches(&device, &shown.drawing, false);
                [ghosts(&device, &shown.drawing, &shown.camera), rods, meshes]
            },
            drawing: shown.drawing.clone(),
            camera: shown.camera,
        }),
    }
}

/// The opaque or the see-through part of a drawing.
fn batches(device: &RenderDevice, drawing: &Drawing, solid: bool) -> [Option<Batch>; 3] {
    let balls = bytes::balls(drawing.balls.iter().filter(|ball| is_solid_ball(ball) == solid));
    let rods = bytes::rods(drawing.rods.iter().filter(|rod| is_solid_rod(rod) == solid));
    let [points, triangles] =
        bytes::meshes(drawing.meshes.iter().filter(|mesh| is_solid_mesh(mesh) == solid));
    let meshes = (!triangles.is_empty()).then(|| Batch {
        data: store(device, &points, BufferUsages::VERTEX),
        triangles: Some(store(device, &triangles, BufferUsages::INDEX)),
        count: (triangles.len() / 4) as u32,
    });
    [instances(device, &balls, bytes::BALL), instances(device, &rods, bytes::ROD), meshes]
}

/// See-through balls, those far away first.
fn ghosts(device: &RenderDevice, drawing: &Drawing, camera: &Camera) -> Option<Batch> {
    let mut ghosts: Vec<&Ball> = drawing.balls.iter().filter(|ball| !is_solid_ball(ball)).collect();
    ghosts.sort_by(|a, b| camera.view(&b.centre).z.total_cmp(&camera.view(&a.centre).z));
    instances(device, &bytes::balls(ghosts.into_iter()), bytes::BALL)
}

fn instances(device: &RenderDevice, bytes: &[u8], each: u64) -> Option<Batch> {
    (!bytes.is_empty()).then(|| Batch {
        data: store(device, bytes, BufferUsages::VERTEX),
        triangles: None,
        count: (bytes.len() as u64 / each) as u32,
    })
}

fn store(device: &RenderDevice, bytes: &[u8], usage: BufferUsages) -> Buffer {
    device.create_buffer_with_data(&BufferInitDescriptor { label: Some("bed"), contents: bytes, usage })
}

fn is_solid_ball(ball: &Ball) -> bool {
    ball.colour.a == 255
}

fn is_solid_rod(rod: &Rod) -> bool {
    rod.colours.iter().all(|colour| colour.a == 255)
}

fn is_solid_mesh(mesh: &Mesh) -> bool {
    mesh.colours.iter().all(|colour| colour.a == 255)
}
