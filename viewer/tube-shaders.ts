import { FRONT_WIDENING } from './picking.ts';
import { MARK, ROW_SHIFT, ROW_VESSELS } from './scene.ts';

/**
 * Four corners a vessel, found by vertex number alone: the corner's vessel is fetched from textures, and a rectangle
 * is laid square to the line of sight, along the vessel, that just covers its round cone. The fragment shader meets the
 * cone with the line of sight (formulas and letters as in picking.ts) and writes the true depth.
 *
 * The bounds of a ball seen from a point, in slopes against the line of sight: e its sideways offset, z its depth, the
 * tangents are m = (e z ± r √(e² + z² − r²)) / (z² − r²).
 */
const SHARED = /* glsl */ `
precision highp float;
precision highp int;
uniform vec3 eye;
uniform vec3 forward;
uniform bool perspective;
uniform float pixel;      // one pixel in scene units, at distance 1 (parallel: anywhere)
`;

export const TUBE_VERTEX = /* glsl */ `${SHARED}
precision highp sampler2D;
precision highp usampler2D;
uniform mat4 viewMatrix;
uniform mat4 projectionMatrix;
uniform sampler2D endsMap;
uniform sampler2D valuesMap;
uniform usampler2D marksMap;
uniform vec3 rightEdge;   // from the middle of the picture to its edge, at distance 1 (parallel: in scene units)
uniform vec3 topEdge;
uniform float leastPixels;
uniform float thinnest;
uniform float lowestOrder;
uniform bool hasWay;

flat out vec4 tubeA;
flat out vec4 tubeB;
flat out vec2 tubeValues; // at both ends
flat out int tubeMarks;
out vec3 onPlane;

// The bound on one side: 1 the upper, −1 the lower.
float reach(float e, float z, float r, float side) {
  if (!perspective) return e + side * r;
  float q = z * z - r * r;
  return (e * z + side * r * sqrt(max(e * e + q, 0.0))) / q;
}

void main() {
  int vessel = gl_VertexID >> 2;
  ivec2 cell = ivec2(vessel & ${ROW_VESSELS - 1}, vessel >> ${ROW_SHIFT});
  gl_Position = vec4(2.0, 2.0, 2.0, 1.0);
  vec4 b = texelFetch(endsMap, ivec2(2 * cell.x + 1, cell.y), 0);
  uvec2 marks = texelFetch(marksMap, cell, 0).rg;
  if (b.w < thinnest || float(marks.g) < lowestOrder) return;
  vec4 a = texelFetch(endsMap, ivec2(2 * cell.x, cell.y), 0);
  tubeMarks = int(marks.r);

  vec3 u = b.xyz - a.xyz;
  vec3 middle = 0.5 * (a.xyz + b.xyz) - eye;
  float away = length(middle);
  vec3 sight = perspective ? middle / away : forward;
  float pixelHere = perspective ? pixel * away : pixel;
  bool onWay = hasWay && (tubeMarks & ${MARK.way}) != 0;
  float least = 0.5 * leastPixels * pixelHere * (onWay ? ${FRONT_WIDENING.toFixed(1)} : 1.0);
  a.w = max(a.w, least);
  b.w = max(b.w, least);
  tubeA = a;
  tubeB = b;
  tubeValues = texelFetch(valuesMap, cell, 0).rg;

  vec2 corner = vec2(float(gl_VertexID & 1), float((gl_VertexID >> 1) & 1));
  vec3 toA = a.xyz - eye;
  vec3 toB = b.xyz - eye;
  float za = dot(toA, sight);
  float zb = dot(toB, sight);
  if (perspective && (za < 1.02 * a.w || zb < 1.02 * b.w)) {
    // An end is beside or behind the eye, so no rectangle has finite bounds: look for it in the whole picture.
    if (dot(toA, forward) < -a.w && dot(toB, forward) < -b.w) return;
    vec2 ndc = 2.0 * corner - 1.0;
    onPlane = eye + forward + ndc.x * rightEdge + ndc.y * topEdge;
    gl_Position = vec4(ndc, 0.0, 1.0);
    return;
  }
  vec3 lengthwise = u - sight * dot(u, sight);
  float seen = length(lengthwise);
  lengthwise = seen > 1e-3 * (a.w + b.w) ? lengthwise / seen
    : normalize(cross(sight, abs(sight.z) < 0.9 ? vec3(0.0, 0.0, 1.0) : vec3(1.0, 0.0, 0.0)));
  vec3 across = cross(sight, lengthwise);
  float slack = 0.05 * (perspective ? pixel : pixelHere);
  float side = corner.x < 0.5 ? -1.0 : 1.0;
  float su = side * (slack + max(side * reach(dot(toA, lengthwise), za, a.w, side),
                                 side * reach(dot(toB, lengthwise), zb, b.w, side)));
  // Both ends lie in one plane with the line of sight: sideways of it there is only the radius.
  float sideways = slack + 1.002 * (perspective ? max(a.w * inversesqrt(za * za - a.w * a.w), b.w * inversesqrt(zb * zb - b.w * b.w))
                                            : max(a.w, b.w));
  float sw = (perspective ? 0.0 : dot(middle, across)) + (corner.y < 0.5 ? -sideways : sideways);
  vec3 flatPlace = su * lengthwise + sw * across;
  onPlane = perspective ? eye + away * (sight + flatPlace) : eye + flatPlace + sight * dot(middle, sight);
  gl_Position = projectionMatrix * viewMatrix * vec4(onPlane, 1.0);
  // The true depth is written below; this one only has to lie within the near and the far plane.
  gl_Position.z = 0.0;
}
`;

export const TUBE_FRAGMENT = /* glsl */ `${SHARED}
precision highp sampler2D;
uniform vec3 right;
uniform vec3 up;
uniform vec4 plane;      // n·x ≤ d is kept
uniform vec4 depthRow;   // third and fourth row of projection × view
uniform vec4 clipRow;
uniform float nearest;   // least distance drawn
uniform vec2 range;      // low and high end of the colour scale
uniform bool logScale;
uniform sampler2D palette;
uniform bool hasWay;
uniform vec3 paper;
uniform vec3 ink;
uniform vec3 accent;

flat in vec4 tubeA;
flat in vec4 tubeB;
flat in vec2 tubeValues;
flat in int tubeMarks;
in vec3 onPlane;
out vec4 colour;

void take(inout vec2 span, float t) {
  span = vec2(min(span.x, t), max(span.y, t));
}

void main() {
  vec3 d = perspective ? normalize(onPlane - eye) : forward;
  vec3 u = tubeB.xyz - tubeA.xyz;
  float ra = tubeA.w;
  float rb = tubeB.w;
  // Start beside the vessel: from the eye, squares of distances would swallow a thin radius in float32.
  vec3 origin = perspective ? eye : onPlane;
  vec3 w = origin - tubeA.xyz;
  float start = dot(0.5 * u - w, d);
  w += start * d;

  float ww = dot(w, w);
  float wd = dot(w, d);
  float uu = dot(u, u);
  float wu = dot(w, u);
  float du = dot(d, u);
  vec2 span = vec2(1e20, -1e20);
  float h = wd * wd - ww + ra * ra;
  if (h >= 0.0) { h = sqrt(h); take(span, -wd - h); take(span, -wd + h); }
  vec3 v = w - u;
  float vd = dot(v, d);
  h = vd * vd - dot(v, v) + rb * rb;
  if (h >= 0.0) { h = sqrt(h); take(span, -vd - h); take(span, -vd + h); }
  float e = ra - rb;
  float k = uu - e * e;
  float y0 = wu - ra * e;
  if (k > 0.0) {
    float qa = k - du * du;
    float qb = k * wd - y0 * du;
    float qc = k * (ww - ra * ra) - y0 * y0;
    h = qb * qb - qa * qc;
    if (h >= 0.0) {
      float q = -(qb + (qb < 0.0 ? -sqrt(h) : sqrt(h)));
      float first = q / qa;
      float second = qc / q;
      float y = y0 + first * du;
      if (y >= 0.0 && y <= k) take(span, first);
      y = y0 + second * du;
      if (y >= 0.0 && y <= k) take(span, second);
    }
  }
  if (span.x > span.y) discard;

  float t = span.x;
  bool cut = false;
  float side = dot(plane.xyz, tubeA.xyz + w) - plane.w;
  float along = dot(plane.xyz, d);
  if (side + along * t > 0.0) {
    if (along >= 0.0) discard;
    t = -side / along;
    if (t > span.y) discard;
    cut = true;
  }
  if (start + t < nearest) discard;

  vec3 p = w + t * d;
  float s = k > 0.0 ? clamp((dot(p, u) - ra * e) / k, 0.0, 1.0) : (ra > rb ? 0.0 : 1.0);
  vec3 outward = p - s * u;
  float radius = ra - s * e;
  // Half width in pixels, here: a long vessel may be near at one end and far at the other.
  float pixels = radius / (perspective ? pixel * (start + t) : pixel);

  float axial = uu > 0.0 ? clamp(dot(p, u) / uu, 0.0, 1.0) : 0.0;
  float value = mix(tubeValues.x, tubeValues.y, axial);
  float place = logScale ? log(max(value, 1e-30) / range.x) / log(range.y / range.x)
                         : (value - range.x) / (range.y - range.x);
  vec3 base = texture(palette, vec2(clamp(place, 0.0, 1.0) * 255.0 / 256.0 + 0.5 / 256.0, 0.5)).rgb;

  bool onWay = (tubeMarks & ${MARK.way}) != 0;
  bool chosen = hasWay && (tubeMarks & ${MARK.chosen}) != 0;
  bool drain = (tubeMarks & ${MARK.drain}) != 0;
  // A line of ink about a pixel wide along the outline; thin vessels, which would be all line, keep their colour.
  float inkiness = clamp((pixels - 1.0) / 2.5, 0.0, 1.0);
  float rim;
  if (cut) {
    // A cut face is flat: full colour, no shading, and its rim drawn in ink.
    rim = smoothstep(-2.0, -0.9, (length(outward) / radius - 1.0) * pixels);
    base = mix(base, vec3(1.0), 0.16);
  } else {
    vec3 n = outward / radius;
    float facing = clamp(-dot(n, d), 0.0, 1.0);
    float lit = clamp(dot(n, normalize(-d + 0.55 * up - 0.4 * right)), 0.0, 1.0);
    // How far out towards the outline, 0 to 1. Along a tube this must not count how steeply it points at the eye.
    vec3 across = cross(d, u);
    float sideways = s > 0.0 && s < 1.0 ? abs(dot(n, across)) * inversesqrt(max(dot(across, across), 1e-30))
                                        : sqrt(1.0 - facing * facing);
    rim = smoothstep(-1.7, -0.5, (sideways - 1.0) * pixels);
    float shade = mix(0.94, 0.6 + 0.2 * facing + 0.27 * lit, inkiness);
    base *= shade;
    if (drain) {
      // Rings round draining vessels: one that stands out from the colour, and beside it, where there is room, one of
      // the other kind. Their pitch follows the width, but never falls under ten pixels.
      float wide = max(ra, rb);
      float size = radius / pixels;
      float pitch = 3.4 * wide;
      pitch *= exp2(ceil(max(0.0, log2(10.0 * size / pitch))));
      float phase = fract(dot(p, u) * inversesqrt(max(uu, 1e-30)) / pitch) * pitch / size;
      float part = pitch / size;
      float first = clamp(phase + 0.5, 0.0, 1.0) * clamp(0.18 * part - phase + 0.5, 0.0, 1.0);
      float second = clamp(phase - 0.18 * part + 0.5, 0.0, 1.0) * clamp(0.27 * part - phase + 0.5, 0.0, 1.0);
      bool dim = dot(base, vec3(0.3, 0.59, 0.11)) < 0.42;
      vec3 light = vec3(0.97) * shade;
      base = mix(base, dim ? light : ink, 0.85 * first);
      base = mix(base, dim ? ink : light, 0.85 * inkiness * second);
    }
  }
  vec3 shown = mix(base, ink, 0.8 * rim * inkiness);
  if (chosen) shown = cut ? accent : mix(mix(accent * (0.75 + 0.25 * (1.0 - rim)), vec3(1.0), 0.15), ink, rim);
  else if (hasWay && !onWay) shown = mix(shown, paper, 0.78);
  colour = vec4(shown, 1.0);

  // Cut faces that overlap lie in one plane: the vessel that holds the point deepest comes forward, so that they do not
  // flicker and no rim shows inside another's face. Before a cut face everything is cut away.
  float forth = cut ? 0.1 * (radius - length(outward)) : 0.0;
  vec4 hit = vec4(tubeA.xyz + p - forth * d, 1.0);
  float depth = 0.5 + 0.5 * dot(depthRow, hit) / dot(clipRow, hit);
  // The way is drawn in front of all else.
  if (hasWay && onWay) depth *= 0.02;
  gl_FragDepth = depth;
}
`;
