/** Atoms and bonds as ray-cast impostors: exact circles and rods from a few triangles each, in flat ink with a paper halo that tells near from far. */
import {
  BufferAttribute,
  BufferGeometry,
  Color,
  DoubleSide,
  GLSL3,
  Mesh,
  RawShaderMaterial,
  Vector2,
} from 'three';

/** One disc. Lengths in Å; `strength` 1 for the unit's own atoms, towards 0 for what recedes. */
export interface Ball {
  readonly x: number;
  readonly y: number;
  readonly z: number;
  readonly radius: number;
  readonly colour: number;
  readonly strength: number;
}

/** One rod between two points, each half in the colour of its end. */
export interface Rod {
  readonly from: readonly [number, number, number];
  readonly to: readonly [number, number, number];
  readonly radius: number;
  readonly colours: readonly [number, number];
  readonly strength: number;
}

/** Width of the ink line around a thing, and of the paper halo outside it, Å. */
const LINE = 0.035;
const HALO = 0.075;

const SHARED = /* glsl */ `
  precision highp float;
  uniform mat4 projectionMatrix;
  uniform vec3 paper;
  uniform vec3 ink;
  uniform vec2 depthRange;
  uniform float line;
  uniform float halo;
  uniform float front;
`;

const TONE = /* glsl */ `
  float depthOf(vec3 p) {
    vec4 clip = projectionMatrix * vec4(p, 1.0);
    return 0.5 * clip.z / clip.w + 0.5;
  }
  vec3 tone(vec3 colour, float strength, float depth) {
    float far = smoothstep(depthRange.x, depthRange.y, depth);
    return mix(paper, colour, strength * (1.0 - (strength < 0.9 ? 0.96 : 0.5) * far));
  }
`;

const BALL_VERTEX = /* glsl */ `
  ${SHARED}
  uniform mat4 modelViewMatrix;
  in vec3 position;
  in vec4 sphere;
  in vec4 look;
  out vec3 vPoint;
  flat out vec4 vSphere;
  flat out vec4 vLook;
  void main() {
    vec3 c = (modelViewMatrix * vec4(sphere.xyz, 1.0)).xyz;
    float r = sphere.w + halo;
    float d2 = dot(c, c);
    float k = r * sqrt(d2 / max(d2 - r * r, 1e-4));
    vec3 w = normalize(c);
    vec3 u = normalize(cross(w, vec3(0.0, 1.0, 0.0)));
    vec3 v = cross(u, w);
    vPoint = c + k * (position.x * u + position.y * v);
    vSphere = vec4(c, sphere.w);
    vLook = look;
    bool hidden = look.a < 0.9 && (-c.z < front - sphere.w || -c.z > depthRange.y);
    gl_Position = hidden ? vec4(2.0, 2.0, 2.0, 1.0) : projectionMatrix * vec4(vPoint, 1.0);
  }
`;

const BALL_FRAGMENT = /* glsl */ `
  ${SHARED}
  ${TONE}
  in vec3 vPoint;
  flat in vec4 vSphere;
  flat in vec4 vLook;
  out vec4 fragment;
  void main() {
    vec3 ray = normalize(vPoint);
    float along = dot(ray, vSphere.xyz);
    float off = sqrt(max(dot(vSphere.xyz, vSphere.xyz) - along * along, 0.0));
    if (off > vSphere.w + halo) discard;
    vec3 hit;
    if (off <= vSphere.w) {
      hit = ray * (along - sqrt(vSphere.w * vSphere.w - off * off));
      bool edge = off > vSphere.w - line;
      fragment = vec4(tone(edge ? ink : vLook.rgb, vLook.a, -hit.z), 1.0);
    } else {
      hit = ray * (along + 0.9);
      fragment = vec4(paper, 1.0);
    }
    if (vLook.a < 0.9 && -hit.z < front) discard;
    gl_FragDepth = depthOf(hit);
  }
`;

const ROD_VERTEX = /* glsl */ `
  ${SHARED}
  uniform mat4 modelViewMatrix;
  in vec3 position;
  in vec4 start;
  in vec4 end;
  in vec3 firstTone;
  in vec3 secondTone;
  out vec3 vPoint;
  flat out vec3 vStart;
  flat out vec3 vAxis;
  flat out vec3 vSize;
  flat out vec3 vFirst;
  flat out vec3 vSecond;
  void main() {
    vec3 a = (modelViewMatrix * vec4(start.xyz, 1.0)).xyz;
    vec3 b = (modelViewMatrix * vec4(end.xyz, 1.0)).xyz;
    float len = max(length(b - a), 1e-4);
    vec3 w = (b - a) / len;
    vec3 sight = normalize(a + b);
    vec3 across = cross(w, sight);
    float slant = max(length(across), 1e-3);
    float r = start.w + halo;
    // A slanting rod shows its side beyond the ends of its axis.
    float over = min(r / slant, 4.0 * r);
    vec3 along = position.y < 0.0 ? a - over * w : b + over * w;
    vPoint = along + 1.04 * r * position.x * across / slant;
    vStart = a;
    vAxis = w;
    vSize = vec3(start.w, len, end.w);
    vFirst = firstTone;
    vSecond = secondTone;
    bool hidden = end.w < 0.9 && (max(-a.z, -b.z) < front || min(-a.z, -b.z) > depthRange.y);
    gl_Position = hidden ? vec4(2.0, 2.0, 2.0, 1.0) : projectionMatrix * vec4(vPoint, 1.0);
  }
`;

const ROD_FRAGMENT = /* glsl */ `
  ${SHARED}
  ${TONE}
  in vec3 vPoint;
  flat in vec3 vStart;
  flat in vec3 vAxis;
  flat in vec3 vSize;
  flat in vec3 vFirst;
  flat in vec3 vSecond;
  out vec4 fragment;
  void main() {
    vec3 ray = normalize(vPoint);
    vec3 across = cross(ray, vAxis);
    float s = length(across);
    if (s < 1e-3) discard;
    float off = abs(dot(vStart, across)) / s;
    if (off > vSize.x + halo) discard;
    vec3 rayFlat = ray - vAxis * dot(ray, vAxis);
    float nearest = dot(rayFlat, vStart) / (s * s);
    bool inside = off <= vSize.x;
    if (inside) nearest -= sqrt(vSize.x * vSize.x - off * off) / s;
    vec3 hit = ray * nearest;
    float height = dot(hit - vStart, vAxis);
    if (height < 0.0 || height > vSize.y) discard;
    if (vSize.z < 0.9 && -hit.z < front) discard;
    if (inside) {
      vec3 colour = height < 0.5 * vSize.y ? vFirst : vSecond;
      fragment = vec4(tone(off > vSize.x - line ? ink : colour, vSize.z, -hit.z), 1.0);
    } else {
      hit += ray * 0.9;
      fragment = vec4(paper, 1.0);
    }
    gl_FragDepth = depthOf(hit);
  }
`;

export interface InkColours {
  readonly paper: string;
  readonly ink: string;
}

/** What both shaders read; shared so that one change of theme or distance reaches both. */
export class InkUniforms {
  readonly values = {
    paper: { value: new Color() },
    ink: { value: new Color() },
    depthRange: { value: new Vector2(20, 40) },
    line: { value: LINE },
    halo: { value: HALO },
    /** What recedes is left out nearer to the reader than this, so that nothing hides the unit. */
    front: { value: 0 },
  };

  setColours({ paper, ink }: InkColours): void {
    setPlain(this.values.paper.value, paper);
    setPlain(this.values.ink.value, ink);
  }

  /** Leaves the halos out while many atoms move. */
  setHalo(on: boolean): void {
    this.values.halo.value = on ? HALO : 0;
  }
}

/** Takes a colour as it is written, without conversion: what is drawn is ink on paper, not light. */
function setPlain(colour: Color, hex: string): void {
  const value = Number.parseInt(hex.slice(1), 16);
  colour.setRGB(((value >> 16) & 255) / 255, ((value >> 8) & 255) / 255, (value & 255) / 255);
}

function material(uniforms: InkUniforms, vertexShader: string, fragmentShader: string): RawShaderMaterial {
  return new RawShaderMaterial({
    glslVersion: GLSL3,
    vertexShader,
    fragmentShader,
    uniforms: uniforms.values,
    toneMapped: false,
    // A mirror image turns the faces round; each ray is cast from one face of the quad all the same.
    side: DoubleSide,
  });
}

function putTone(tones: Float32Array, at: number, colour: number): void {
  tones[at] = ((colour >> 16) & 255) / 255;
  tones[at + 1] = ((colour >> 8) & 255) / 255;
  tones[at + 2] = (colour & 255) / 255;
}

export function ballMesh(balls: readonly Ball[], uniforms: InkUniforms): Mesh {
  const sphere = new Float32Array(4 * balls.length);
  const look = new Float32Array(4 * balls.length);
  balls.forEach((ball, i) => {
    sphere.set([ball.x, ball.y, ball.z, ball.radius], 4 * i);
    putTone(look, 4 * i, ball.colour);
    look[4 * i + 3] = ball.strength;
  });
  const geometry = quads(balls.length, { sphere: [sphere, 4], look: [look, 4] });
  return plainMesh(geometry, material(uniforms, BALL_VERTEX, BALL_FRAGMENT));
}

export function rodMesh(rods: readonly Rod[], uniforms: InkUniforms): Mesh {
  const start = new Float32Array(4 * rods.length);
  const end = new Float32Array(4 * rods.length);
  const firstTone = new Float32Array(3 * rods.length);
  const secondTone = new Float32Array(3 * rods.length);
  rods.forEach((rod, i) => {
    start.set([...rod.from, rod.radius], 4 * i);
    end.set([...rod.to, rod.strength], 4 * i);
    putTone(firstTone, 3 * i, rod.colours[0]);
    putTone(secondTone, 3 * i, rod.colours[1]);
  });
  const geometry = quads(rods.length, {
    start: [start, 4],
    end: [end, 4],
    firstTone: [firstTone, 3],
    secondTone: [secondTone, 3],
  });
  return plainMesh(geometry, material(uniforms, ROD_VERTEX, ROD_FRAGMENT));
}

const CORNERS = [-1, -1, 0, 1, -1, 0, 1, 1, 0, -1, 1, 0];

/**
 * Two triangles for each thing, its values at all four corners. Written out rather than instanced: in software each
 * instance of so few corners costs as much as a draw call.
 */
function quads(
  count: number,
  values: Readonly<Record<string, readonly [Float32Array, number]>>,
): BufferGeometry {
  const position = new Float32Array(12 * count);
  const index = new Uint32Array(6 * count);
  for (let i = 0; i < count; i++) {
    position.set(CORNERS, 12 * i);
    const first = 4 * i;
    index.set([first, first + 1, first + 2, first, first + 2, first + 3], 6 * i);
  }
  const geometry = new BufferGeometry();
  geometry.setAttribute('position', new BufferAttribute(position, 3));
  geometry.setIndex(new BufferAttribute(index, 1));
  for (const [name, [source, size]] of Object.entries(values)) {
    const spread = new Float32Array(4 * source.length);
    for (let i = 0; i < count; i++) {
      const value = source.subarray(size * i, size * (i + 1));
      for (let corner = 0; corner < 4; corner++) spread.set(value, size * (4 * i + corner));
    }
    geometry.setAttribute(name, new BufferAttribute(spread, size));
  }
  return geometry;
}

function plainMesh(geometry: BufferGeometry, look: RawShaderMaterial): Mesh {
  const mesh = new Mesh(geometry, look);
  mesh.frustumCulled = false;
  return mesh;
}
