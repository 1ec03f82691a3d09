/**
 * Shaders for the renderer of 3dmol, in the dialect it translates (attribute, varying, gl_FragColor). Its own sticks
 * are shaded so darkly that a pale tint turns grey, and WebGL draws no line wider than one pixel; a tint has to keep its
 * colour and the thickness has to follow the population, so lines and sticks are drawn here.
 *
 * Both take one quad a segment: `position` is the vertex's own end, `normal` the other end; the sign of `radius` says
 * the side, and END_CODE added to its size that the vertex stands at the second end.
 */

const COMMON_VERTEX = `
uniform mat4 modelViewMatrix;
uniform mat4 projectionMatrix;
attribute vec3 position;
attribute vec3 normal;
attribute vec3 color;
attribute float radius;
varying vec3 vColor;
`;

const COMMON_FRAGMENT = `
uniform vec3 fogColor;
uniform float fogNear;
uniform float fogFar;
varying vec3 vColor;
//DEFINEFRAGCOLOR
vec4 fogged(vec3 shade, float depth) {
  return vec4(mix(shade, fogColor, smoothstep(fogNear, fogFar, depth)), 1.0);
}
`;

export const END_CODE = 8;

/** Layers a line can lie in: one a step of the tint, the first for unknown populations. */
export const LINE_LAYERS = 8;
/** Times the layer, plus half the width in CSS pixels: the size of `radius` of a line. */
export const LAYER_CODE = 16;

/**
 * Flat lines of a fixed width in pixels, ordered by layer and only within a layer by depth: the more populated lies on
 * top, and every line lies behind the structures in atom colours, whichever way the figure is turned.
 */
export const LINE_VERTEX = `${COMMON_VERTEX}
uniform float vWidth;
uniform float vHeight;
uniform float thickness;
varying float vDepth;
void main() {
  vColor = color;
  vec4 own = modelViewMatrix * vec4(position, 1.0);
  vec4 from = projectionMatrix * own;
  vec4 to = projectionMatrix * (modelViewMatrix * vec4(normal, 1.0));
  vec2 size = 0.5 * vec2(vWidth, vHeight);
  vec2 way = (to.xy - from.xy) * size;
  float code = abs(radius);
  float layer = floor(code / ${LAYER_CODE}.0);
  float second = step(${END_CODE}.0, code - layer * ${LAYER_CODE}.0);
  float width = (code - layer * ${LAYER_CODE}.0 - second * ${END_CODE}.0) * thickness;
  way *= 1.0 - 2.0 * second;
  float span = length(way);
  vec2 along = span > 0.0001 ? way / span : vec2(1.0, 0.0);
  vec2 aside = vec2(-along.y, along.x) * sign(radius) + (second - 0.5) * along;
  gl_Position = from;
  gl_Position.xy += aside * width / size;
  gl_Position.z = 0.56 + 0.05 * (${LINE_LAYERS - 1}.0 - layer) + 0.04 * from.z;
  vDepth = -own.z;
}`;

export const LINE_FRAGMENT = `${COMMON_FRAGMENT}
varying float vDepth;
void main() {
  gl_FragColor = fogged(vColor, vDepth);
}`;

/**
 * Round-ended sticks of a radius in Å, and balls as sticks without length, by intersecting the ray of each pixel of an
 * orthographic view. With `casing` the same shape a little wider, in one colour and pushed back by 1 Å: the light edge
 * that parts what crosses in front from what lies behind. `back` lets a shape lie behind another in the same place.
 */
export const STICK_VERTEX = `${COMMON_VERTEX}
uniform float casing;
varying vec2 vPlace;
varying vec3 vFrom;
varying vec3 vTo;
varying float vRadius;
void main() {
  vColor = color;
  vec3 own = (modelViewMatrix * vec4(position, 1.0)).xyz;
  vec3 other = (modelViewMatrix * vec4(normal, 1.0)).xyz;
  float second = step(${END_CODE}.0, abs(radius));
  vFrom = mix(own, other, second);
  vTo = mix(other, own, second);
  vRadius = abs(radius) - second * ${END_CODE}.0 + casing;
  vec2 along = vTo.xy - vFrom.xy;
  float span = length(along);
  along = span > 0.0001 ? along / span : vec2(1.0, 0.0);
  vec2 aside = vec2(-along.y, along.x) * sign(radius) + (2.0 * second - 1.0) * along;
  vPlace = own.xy + aside * vRadius * 1.05;
  gl_Position = projectionMatrix * vec4(vPlace, max(own.z, other.z), 1.0);
}`;

export const STICK_FRAGMENT = `
uniform mat4 projectionMatrix;
uniform float casing;
uniform float back;
uniform vec3 casingColor;
varying vec2 vPlace;
varying vec3 vFrom;
varying vec3 vTo;
varying float vRadius;
${COMMON_FRAGMENT}
void main() {
  float square = vRadius * vRadius;
  vec3 axis = vTo - vFrom;
  float span = length(axis);
  float top = -1.0e6;
  vec3 facing = vec3(0.0, 0.0, 1.0);
  vec2 near = vPlace - vFrom.xy;
  vec2 far = vPlace - vTo.xy;
  float atNear = square - dot(near, near);
  float atFar = square - dot(far, far);
  if (atNear > 0.0) {
    top = vFrom.z + sqrt(atNear);
    facing = vec3(near, sqrt(atNear)) / vRadius;
  }
  if (atFar > 0.0 && vTo.z + sqrt(atFar) > top) {
    top = vTo.z + sqrt(atFar);
    facing = vec3(far, sqrt(atFar)) / vRadius;
  }
  if (span > 0.0001) {
    vec3 u = axis / span;
    vec3 ray = vec3(0.0, 0.0, 1.0) - u * u.z;
    // Heights from here on are above the first end: seen from the far camera they would lose their digits.
    vec3 start = vec3(near, 0.0);
    vec3 aside = start - u * dot(start, u);
    float a = dot(ray, ray);
    float b = dot(ray, aside);
    float d = b * b - a * (dot(aside, aside) - square);
    if (a > 0.0001 && d > 0.0) {
      float z = (sqrt(d) - b) / a;
      float h = dot(start + vec3(0.0, 0.0, z), u);
      if (h >= 0.0 && h <= span && vFrom.z + z > top) {
        top = vFrom.z + z;
        facing = (aside + ray * z) / vRadius;
      }
    }
  }
  if (top < -1.0e5) discard;
  if (casing > 0.0) top -= 1.0;
  vec4 clip = projectionMatrix * vec4(vPlace, top - back, 1.0);
  gl_FragDepthEXT = 0.5 * clip.z / clip.w + 0.5;
  float light = max(dot(facing, normalize(vec3(0.25, 0.35, 1.0))), 0.0);
  vec3 shade = casing > 0.0 ? casingColor : vColor * (0.6 + 0.4 * light);
  gl_FragColor = fogged(shade, -top);
}`;
