use super::buffers::{Batch, SceneBuffers};
use super::bytes::{BALL, POINT, ROD};
use bevy::core_pipeline::core_3d::CORE_3D_DEPTH_FORMAT;
use bevy::mesh::VertexBufferLayout;
use bevy::prelude::*;
use bevy::render::render_phase::TrackedRenderPass;
use bevy::render::render_resource::binding_types::uniform_buffer_sized;
use bevy::render::render_resource::{
    BindGroupLayoutDescriptor, BindGroupLayoutEntries, BlendState, CachedRenderPipelineId, ColorTargetState,
    ColorWrites, CompareFunction, DepthStencilState, FragmentState, IndexFormat, PipelineCache,
    PrimitiveState, PrimitiveTopology, RenderPassDescriptor, RenderPipelineDescriptor, ShaderStages, StoreOp,
    TextureFormat, VertexAttribute, VertexFormat, VertexState, VertexStepMode,
};
use bevy::render::renderer::{RenderContext, ViewQuery};
use bevy::render::view::{ViewDepthTexture, ViewTarget};

/// The shader of all that is drawn.
#[derive(Resource, Clone)]
pub(super) struct SceneShader(pub(super) Handle<Shader>);

/// The pipelines for balls, rods and meshes, opaque and see-through.
#[derive(Resource)]
pub(super) struct Pipelines {
    /// Layout of the view.
    pub(super) view: BindGroupLayoutDescriptor,
    solid: [CachedRenderPipelineId; 3],
    clear: [CachedRenderPipelineId; 3],
}

impl FromWorld for Pipelines {
    fn from_world(world: &mut World) -> Self {
        let shader = world.resource::<SceneShader>().0.clone();
        let view = BindGroupLayoutDescriptor::new(
            "view of the bed",
            &BindGroupLayoutEntries::single(ShaderStages::VERTEX_FRAGMENT, uniform_buffer_sized(false, None)),
        );
        let cache = world.resource::<PipelineCache>();
        let queue =
            |solid| Kind::ALL.map(|kind| cache.queue_render_pipeline(describe(kind, solid, &view, &shader)));
        let (solid, clear) = (queue(true), queue(false));
        Self { view, solid, clear }
    }
}

/// Draws the bed into the view of a camera: what is opaque, then what is seen through.
pub(super) fn draw(
    view: ViewQuery<(&ViewTarget, &ViewDepthTexture)>,
    buffers: Option<Res<SceneBuffers>>,
    pipelines: Res<Pipelines>,
    cache: Res<PipelineCache>,
    mut context: RenderContext,
) {
    let Some(buffers) = buffers else { return };
    let (target, depth) = view.into_inner();
    let mut pass = context.begin_tracked_render_pass(RenderPassDescriptor {
        label: Some("bed"),
        color_attachments: &[Some(target.get_color_attachment())],
        depth_stencil_attachment: Some(depth.get_attachment(StoreOp::Store)),
        ..default()
    });
    let ready = |ids: &[CachedRenderPipelineId; 3]| ids.map(|id| cache.get_render_pipeline(id));
    pass.set_bind_group(0, &buffers.view, &[]);
    for (batches, pipelines) in
        [(&buffers.solid, ready(&pipelines.solid)), (&buffers.clear, ready(&pipelines.clear))]
    {
        for (batch, pipeline) in batches.iter().zip(pipelines) {
            if let (Some(batch), Some(pipeline)) = (batch, pipeline) {
                pass.set_render_pipeline(pipeline);
                draw_batch(batch, &mut pass);
            }
        }
    }
}

/// Draws one batch with the pipeline that is set.
fn draw_batch<'a>(batch: &'a Batch, pass: &mut TrackedRenderPass<'a>) {
    pass.set_vertex_buffer(0, batch.data.slice(..));
    match &batch.triangles {
        Some(triangles) => {
            pass.set_index_buffer(triangles.slice(..), IndexFormat::Uint32);
            pass.draw_indexed(0..batch.count, 0, 0..1);
        }
        None => pass.draw(0..4, 0..batch.count),
    }
}

/// What a pipeline draws.
#[derive(Clone, Copy)]
enum Kind {
    Balls,
    Rods,
    Meshes,
}

impl Kind {
    const ALL: [Self; 3] = [Self::Balls, Self::Rods, Self::Meshes];

    /// Name of the shader's functions, how the data is stepped through, its stride and its formats.
    fn layout(self) -> (&'static str, VertexStepMode, u64, &'static [VertexFormat]) {
        use VertexFormat::{Float32, Float32x3, Uint32, Unorm8x4};
        match self {
            Self::Balls => ("ball", VertexStepMode::Instance, BALL, &[Float32x3, Float32, Unorm8x4]),
            Self::Rods => {
                ("rod", VertexStepMode::Instance, ROD, &[Float32x3, Float32x3, Float32, Unorm8x4, Unorm8x4])
            }
            Self::Meshes => {
                ("mesh", VertexStepMode::Vertex, POINT, &[Float32x3, Float32x3, Unorm8x4, Uint32])
            }
        }
    }
}

/// Describes the pipeline of a kind.
fn describe(
    kind: Kind,
    solid: bool,
    view: &BindGroupLayoutDescriptor,
    shader: &Handle<Shader>,
) -> RenderPipelineDescriptor {
    let (name, step_mode, array_stride, formats) = kind.layout();
    let mut offset = 0;
    let attributes = formats
        .iter()
        .zip(0..)
        .map(|(format, shader_location)| {
            let attribute = VertexAttribute { format: *format, offset, shader_location };
            offset += format.size();
            attribute
        })
        .collect();
    RenderPipelineDescriptor {
        label: Some(name.into()),
        layout: vec![view.clone()],
        vertex: VertexState {
            shader: shader.clone(),
            entry_point: Some(format!("{name}_vertex").into()),
            buffers: vec![VertexBufferLayout { array_stride, step_mode, attributes }],
            ..default()
        },
        primitive: PrimitiveState {
            topology: match kind {
                Kind::Meshes => PrimitiveTopology::TriangleList,
                _ => PrimitiveTopology::TriangleStrip,
            },
            ..default()
        },
        depth_stencil: Some(DepthStencilState {
            format: CORE_3D_DEPTH_FORMAT,
            depth_write_enabled: Some(solid),
            depth_compare: Some(CompareFunction::GreaterEqual),
            stencil: default(),
            bias: default(),
        }),
        fragment: Some(FragmentState {
            shader: shader.clone(),
            entry_point: Some(format!("{name}_fragment").into()),
            targets: vec![Some(ColorTargetState {
                format: TextureFormat::Rgba8UnormSrgb,
                blend: (!solid).then_some(BlendState::PREMULTIPLIED_ALPHA_BLENDING),
                write_mask: ColorWrites::ALL,
            })],
            ..default()
        }),
        ..default()
    }
}
