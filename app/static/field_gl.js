// A field by WebGL2: colours from a ramp, lines of equal vector potential made in the shader.

import { ramp } from "./colours.js";

const VERTEX = `#version 300 es
in vec2 place; in float value; in float line;
uniform vec2 middle; uniform vec2 scale;
out float shown; out float level;
void main() {
  gl_Position = vec4((place - middle) * scale, 0.0, 1.0);
  shown = value; level = line;
}`;
const FRAGMENT = `#version 300 es
precision highp float;
in float shown; in float level;
uniform sampler2D colours; uniform vec2 range; uniform float spacing; uniform float ink; uniform float bright;
out vec4 colour;
// Lines lie halfway between whole numbers: none where the potential is 0, as on the rim and in most
// of the shaft.
float line(float turns) {
  float width = fwidth(turns);
  float off = abs(fract(turns) - 0.5);
  return (1.0 - smoothstep(0.5 * ink * width, (0.5 * ink + 0.8) * width, off)) * (1.0 - smoothstep(0.2, 0.42, width));
}
void main() {
  float t = clamp((shown - range.x) / max(range.y - range.x, 1e-30), 0.0, 1.0);
  vec3 base = texture(colours, vec2(t * 255.0 / 256.0 + 0.5 / 256.0, 0.5)).rgb;
  // Where lines are too close to be told apart two of three fade, then all: the colour stays true.
  float cover = spacing > 0.0 ? 0.55 * max(line(level / spacing), line(level / (3.0 * spacing))) : 0.0;
  vec3 pen = dot(base, vec3(0.3, 0.6, 0.1)) > bright ? vec3(0.03, 0.06, 0.08) : vec3(0.92);
  colour = vec4(mix(base, pen, cover), 1.0);
}`;

export class FieldGl {
  #gl;
  #program;
  #count = 0;
  #picture = null;
  #buffers = [];

  // Throws where there is no WebGL2.
  constructor(canvas) {
    const gl = canvas.getContext("webgl2", { antialias: true });
    if (!gl) throw new Error("no WebGL2");
    this.#gl = gl;
    this.#program = gl.createProgram();
    for (const [kind, source] of [[gl.VERTEX_SHADER, VERTEX], [gl.FRAGMENT_SHADER, FRAGMENT]]) {
      const shader = gl.createShader(kind);
      gl.shaderSource(shader, source);
      gl.compileShader(shader);
      gl.attachShader(this.#program, shader);
    }
    gl.linkProgram(this.#program);
    if (!gl.getProgramParameter(this.#program, gl.LINK_STATUS)) throw new Error(gl.getProgramInfoLog(this.#program));
    gl.useProgram(this.#program);
    gl.bindTexture(gl.TEXTURE_2D, gl.createTexture());
    for (const [name, value] of [["MIN_FILTER", gl.LINEAR], ["MAG_FILTER", gl.LINEAR], ["WRAP_S", gl.CLAMP_TO_EDGE], ["WRAP_T", gl.CLAMP_TO_EDGE]]) {
      gl.texParameteri(gl.TEXTURE_2D, gl[`TEXTURE_${name}`], value);
    }
  }

  // Three corners of its own for each triangle, since a value may belong to the triangle.
  show(picture) {
    const gl = this.#gl;
    this.#picture = picture;
    this.#buffers.forEach((buffer) => gl.deleteBuffer(buffer));
    const { positions, triangles, values, lines, isPerTriangle } = picture;
    this.#count = triangles.length;
    const [place, value, line] = [new Float32Array(2 * this.#count), new Float32Array(this.#count), new Float32Array(this.#count)];
    for (let k = 0; k < this.#count; k += 1) {
      const node = triangles[k];
      place[2 * k] = positions[2 * node];
      place[2 * k + 1] = positions[2 * node + 1];
      value[k] = values[isPerTriangle ? (k - (k % 3)) / 3 : node];
      if (lines) line[k] = lines[node];
    }
    this.#buffers = [["place", place, 2], ["value", value, 1], ["line", line, 1]].map(([name, data, size]) => this.#attribute(name, data, size));
    gl.texImage2D(gl.TEXTURE_2D, 0, gl.RGBA, 256, 1, 0, gl.RGBA, gl.UNSIGNED_BYTE, ramp(picture.ramp));
  }

  draw({ middle, scale, size }, ratio) {
    const gl = this.#gl;
    gl.viewport(0, 0, gl.drawingBufferWidth, gl.drawingBufferHeight);
    gl.clearColor(0, 0, 0, 0);
    gl.clear(gl.COLOR_BUFFER_BIT);
    if (!this.#picture) return;
    gl.uniform2f(this.#at("middle"), middle.x, middle.y);
    gl.uniform2f(this.#at("scale"), (2 * scale) / size.width, (-2 * scale) / size.height);
    gl.uniform2f(this.#at("range"), this.#picture.low, this.#picture.high);
    gl.uniform1f(this.#at("spacing"), this.#picture.spacing);
    gl.uniform1f(this.#at("ink"), 0.6 * ratio);
    gl.uniform1f(this.#at("bright"), this.#picture.ramp === "signed" ? 0.35 : 0.85);
    gl.drawArrays(gl.TRIANGLES, 0, this.#count);
  }

  #at(name) {
    return this.#gl.getUniformLocation(this.#program, name);
  }

  #attribute(name, data, size) {
    const gl = this.#gl;
    const buffer = gl.createBuffer();
    gl.bindBuffer(gl.ARRAY_BUFFER, buffer);
    gl.bufferData(gl.ARRAY_BUFFER, data, gl.STATIC_DRAW);
    const place = gl.getAttribLocation(this.#program, name);
    gl.enableVertexAttribArray(place);
    gl.vertexAttribPointer(place, size, gl.FLOAT, false, 0, 0);
    return buffer;
  }
}
