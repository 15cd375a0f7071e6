use serde_json::{Map, Value, json};

/// The JSON part and the numbers of a glTF file in the making.
#[derive(Default)]
pub(super) struct Document {
    bytes: Vec<u8>,
    views: Vec<Value>,
    accessors: Vec<Value>,
    pub(super) materials: Vec<Value>,
    pub(super) meshes: Vec<Value>,
    pub(super) nodes: Vec<Value>,
}

/// What a buffer is for (glTF 2.0, 5.11.5).
const VERTICES: u32 = 34962;
const INDICES: u32 = 34963;
/// Kinds of numbers (glTF 2.0, 5.1.3).
const SHORT: u32 = 5123;
const INTEGER: u32 = 5125;
const FLOAT: u32 = 5126;

impl Document {
    /// Adds places and tells their accessor; readers want their bounds.
    pub(super) fn places(&mut self, places: &[[f32; 3]]) -> usize {
        let mut accessor = self.vectors(places);
        let bound = |pick: fn(f32, f32) -> f32| {
            places.iter().copied().reduce(|a, b| [0, 1, 2].map(|axis| pick(a[axis], b[axis])))
        };
        accessor["min"] = json!(bound(f32::min));
        accessor["max"] = json!(bound(f32::max));
        self.accessor(accessor)
    }

    /// Adds unit vectors and tells their accessor.
    pub(super) fn directions(&mut self, directions: &[[f32; 3]]) -> usize {
        let accessor = self.vectors(directions);
        self.accessor(accessor)
    }

    /// Adds linear colours, 0 to 1, kept with 16 bits, and tells their accessor.
    pub(super) fn colours(&mut self, colours: &[[f32; 4]]) -> usize {
        let bytes =
            colours.iter().flatten().flat_map(|value| ((value * 65535.0).round() as u16).to_le_bytes());
        let view = self.view(bytes, VERTICES);
        self.accessor(json!({
            "bufferView": view, "componentType": SHORT, "normalized": true, "count": colours.len(), "type": "VEC4",
        }))
    }

    /// Adds the corners of triangles and tells their accessor.
    pub(super) fn triangles(&mut self, triangles: &[[u32; 3]]) -> usize {
        let bytes = triangles.iter().flatten().flat_map(|corner| corner.to_le_bytes());
        let view = self.view(bytes, INDICES);
        self.accessor(json!({
            "bufferView": view, "componentType": INTEGER, "count": 3 * triangles.len(), "type": "SCALAR",
        }))
    }

    pub(super) fn material(&mut self, material: Value) -> usize {
        push(&mut self.materials, material)
    }

    pub(super) fn mesh(&mut self, primitive: Value) -> usize {
        push(&mut self.meshes, json!({ "primitives": [primitive] }))
    }

    /// The file's bytes (glTF 2.0, chapter 4); `None` if it is too large for the format.
    pub(super) fn into_bytes(mut self) -> Option<Vec<u8>> {
        let mut text = serde_json::to_vec(&self.json()).expect("numbers and words make JSON");
        text.resize(text.len().next_multiple_of(4), b' ');
        self.bytes.resize(self.bytes.len().next_multiple_of(4), 0);
        let mut chunks = Vec::new();
        chunk(&mut chunks, *b"JSON", &text)?;
        if !self.bytes.is_empty() {
            chunk(&mut chunks, *b"BIN\0", &self.bytes)?;
        }
        let mut file = b"glTF".to_vec();
        file.extend(2_u32.to_le_bytes());
        file.extend(u32::try_from(12 + chunks.len()).ok()?.to_le_bytes());
        file.append(&mut chunks);
        Some(file)
    }

    fn json(&mut self) -> Value {
        let mut root = Map::new();
        root.insert("asset".to_owned(), json!({ "version": "2.0", "generator": "bedswell" }));
        if self.materials.iter().any(|material| material.get("extensions").is_some()) {
            root.insert("extensionsUsed".to_owned(), json!([UNLIT]));
        }
        if self.nodes.is_empty() {
            // Readers refuse a scene without nodes.
            self.nodes.push(json!({ "name": "nothing" }));
        }
        let all: Vec<usize> = (0..self.nodes.len()).collect();
        root.insert("scene".to_owned(), json!(0));
        root.insert("scenes".to_owned(), json!([{ "nodes": all }]));
        if !self.bytes.is_empty() {
            root.insert("buffers".to_owned(), json!([{ "byteLength": self.bytes.len() }]));
        }
        for (name, list) in [
            ("bufferViews", &mut self.views),
            ("accessors", &mut self.accessors),
            ("materials", &mut self.materials),
            ("meshes", &mut self.meshes),
            ("nodes", &mut self.nodes),
        ] {
            // The format has no empty lists.
            if !list.is_empty() {
                root.insert(name.to_owned(), Value::Array(std::mem::take(list)));
            }
        }
        Value::Object(root)
    }

    fn vectors(&mut self, vectors: &[[f32; 3]]) -> Value {
        let view = self.view(vectors.iter().flatten().flat_map(|value| value.to_le_bytes()), VERTICES);
        json!({ "bufferView": view, "componentType": FLOAT, "count": vectors.len(), "type": "VEC3" })
    }

    fn view(&mut self, bytes: impl Iterator<Item = u8>, target: u32) -> usize {
        let start = self.bytes.len();
        self.bytes.extend(bytes);
        let length = self.bytes.len() - start;
        let view = json!({ "buffer": 0, "byteOffset": start, "byteLength": length, "target": target });
        push(&mut self.views, view)
    }

    fn accessor(&mut self, accessor: Value) -> usize {
        push(&mut self.accessors, accessor)
    }
}

/// Extension for colours shown as they are.
pub(super) const UNLIT: &str = "KHR_materials_unlit";

fn push(list: &mut Vec<Value>, value: Value) -> usize {
    list.push(value);
    list.len() - 1
}

fn chunk(file: &mut Vec<u8>, kind: [u8; 4], bytes: &[u8]) -> Option<()> {
    file.extend(u32::try_from(bytes.len()).ok()?.to_le_bytes());
    file.extend(kind);
    file.extend(bytes);
    Some(())
}
